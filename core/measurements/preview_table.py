"""The first and last rows of a table, as words for a page."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FIRST, LAST = 8, 4


@dataclass(frozen=True)
class Row:
    """A row's line in its file and its numbers."""

    line: int | None
    cells: tuple[str, ...]


@dataclass(frozen=True)
class PreviewTable:
    """Head and tail of a table; `left_out` rows between them are not shown."""

    titles: tuple[str, ...]
    first: tuple[Row, ...]
    left_out: int
    last: tuple[Row, ...]


def preview_table(
    titles: Sequence[str], values: NDArray[np.float64], lines: NDArray[np.int64] | None = None
) -> PreviewTable:
    """The first and last rows; all of a short table."""
    total = len(values)
    if total <= FIRST + LAST:
        return PreviewTable(tuple(titles), _rows(values, lines, 0, total), 0, ())
    first, last = _rows(values, lines, 0, FIRST), _rows(values, lines, total - LAST, total)
    return PreviewTable(tuple(titles), first, total - FIRST - LAST, last)


def _rows(
    values: NDArray[np.float64], lines: NDArray[np.int64] | None, start: int, stop: int
) -> tuple[Row, ...]:
    return tuple(
        Row(
            None if lines is None else int(lines[index]),
            tuple(f"{value:.10g}" for value in values[index]),
        )
        for index in range(start, stop)
    )
