"""Tables as CSV, for downloads."""

from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

# A spreadsheet takes a cell that starts so for a formula.
FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")
ROWS_AT_A_TIME = 5000


def csv_lines(titles: Sequence[str], values: NDArray[np.float64]) -> Iterator[str]:
    """Header and rows, in pieces; each number is written so that it reads back to the same bits."""
    yield ",".join(cell(title) for title in titles) + "\r\n"
    for start in range(0, len(values), ROWS_AT_A_TIME):
        rows = values[start : start + ROWS_AT_A_TIME].tolist()
        yield "".join(",".join(map(repr, row)) + "\r\n" for row in rows)


def cell(text: str) -> str:
    """Words as one cell that no spreadsheet runs as a formula."""
    if text.startswith(FORMULA_STARTS):
        text = "'" + text
    if any(mark in text for mark in ',"\r\n'):
        text = '"' + text.replace('"', '""') + '"'
    return text
