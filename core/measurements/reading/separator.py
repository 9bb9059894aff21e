"""What stands between the cells of a line."""

import csv
import re

from core.measurements.reading.grammar import DECIMAL_COMMA, NUMBER, VALUE
from core.measurements.reading.limits import MAXIMUM_HEADER_LENGTH

# Any run of spaces and tabs.
BLANKS = " "
RUN_OF_BLANKS = re.compile(r"[ \t]+")
ANY_SEPARATOR = re.compile(r"[,; \t]")


def separator_of(lines: list[str]) -> str:
    """The separator of the whole file: ",", ";", a tab or BLANKS, from its first line of values."""
    line = lines[0].strip(" \t")
    if len(lines) > 1 and not VALUE.fullmatch(ANY_SEPARATOR.split(line, maxsplit=1)[0]):
        line = lines[1].strip(" \t")
    if ";" in line:
        return ";"
    if "," in line and not _has_decimal_commas(RUN_OF_BLANKS.split(line)):
        return ","
    by_tab = [cell.strip(" ") for cell in line.split("\t")]
    return "\t" if len(by_tab) > 1 and not any(" " in cell for cell in by_tab) else BLANKS


def cells_of(line: str, separator: str) -> list[str]:
    """The line's cells without the blanks around them."""
    if separator == BLANKS:
        return RUN_OF_BLANKS.split(line.strip(" \t"))
    return [cell.strip(" \t") for cell in line.split(separator)]


def names_of(line: str, separator: str) -> list[str]:
    """The names in a header line, which may be quoted."""
    if separator == BLANKS:
        names = [name.strip('"') for name in cells_of(line, separator)]
    else:
        names = next(csv.reader([line], delimiter=separator, skipinitialspace=True), [])
    return [name.strip()[:MAXIMUM_HEADER_LENGTH] for name in names]


def _has_decimal_commas(cells: list[str]) -> bool:
    """Whether these cells, cut at blanks, are all numbers, some of them with a decimal comma."""
    commas = [cell for cell in cells if DECIMAL_COMMA.fullmatch(cell)]
    others = [cell for cell in cells if NUMBER.fullmatch(cell)]
    return len(cells) > 1 and bool(commas) and len(commas) + len(others) == len(cells)
