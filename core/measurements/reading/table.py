"""A table of numbers read from text.

A clean file goes through NumPy's parser in C. Any other is gone through cell by cell, which is slower and
finds its first fault. Both take exactly the same files: the quick way is open only to files that are written
with the characters of numbers, of which both parsers accept the same.
"""

from array import array
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from core.measurements.reading.grammar import VALUE, cell_fault, number_in
from core.measurements.reading.limits import DATA_TABLE, TableLimits
from core.measurements.reading.names import safe_name
from core.measurements.reading.separator import BLANKS, cells_of, names_of, separator_of
from core.measurements.reading.text import NUMERIC, TextLines, text_lines, too_many_rows
from core.user_error import UserError


@dataclass(frozen=True, eq=False)
class Table:
    """Numbers in rows and columns.

    headers  one per column, "" where it has none
    values   shape (rows, columns), finite
    lines    shape (rows,): the line of the file that each row stood on, counting from 1
    """

    file_name: str
    headers: tuple[str, ...]
    values: NDArray[np.float64]
    lines: NDArray[np.int64]

    @property
    def titles(self) -> tuple[str, ...]:
        """Headers, with "column 3" for what has none."""
        return tuple(header or f"column {index}" for index, header in enumerate(self.headers, 1))


@dataclass(frozen=True, eq=False)
class _Layout:
    """How the rows of one file are to be read, and what a fault needs to be named."""

    file_name: str
    separator: str
    headers: tuple[str, ...]
    first_line: int  # whose cells every row is counted against


def read_table(
    content: bytes, file_name: str, *, limits: TableLimits = DATA_TABLE, may_have_header: bool = True
) -> Table:
    """The table in an uploaded file, or a UserError with the first fault's line and column."""
    file_name = safe_name(file_name)
    text = text_lines(content, file_name, limits)
    if not text.lines:
        raise UserError("empty-file", "holds no numbers", "Give a table with one row per point", file_name)
    separator = separator_of(text.lines)
    cells = cells_of(text.lines[0], separator)
    has_header = may_have_header and _is_header(cells)
    headers = names_of(text.lines[0], separator) if has_header else [""] * len(cells)
    first_line = int(text.numbers[0])
    if len(headers) > limits.columns:
        reason = f"{len(headers)} columns are more than the {limits.columns} allowed"
        raise UserError("too-many-columns", reason, "Keep those that are needed", file_name, first_line)
    rows = len(text.lines) - has_header
    if rows > limits.rows:
        raise too_many_rows(file_name, rows, limits)
    if limits.cells is not None and rows * len(headers) > limits.cells:
        reason = f"{rows} × {len(headers)} numbers are more than the {limits.cells} allowed"
        raise UserError("too-many-cells", reason, "Thin the rows or the columns", file_name)
    if rows == 0:
        reason = "holds a header and no rows"
        raise UserError("empty-file", reason, "Give a table with one row per point", file_name, first_line)
    layout = _Layout(file_name, separator, tuple(headers), first_line)
    values = _read_quickly(text, layout, has_header)
    if values is None:
        values = _read_exactly(text, layout, has_header)
    return Table(file_name, layout.headers, values, text.numbers[int(has_header) :])


def _is_header(cells: list[str]) -> bool:
    """Whether a first line holds names: something, and nothing that was meant as a value."""
    return any(cells) and not any(VALUE.fullmatch(cell) for cell in cells)


def _read_quickly(text: TextLines, layout: _Layout, has_header: bool) -> NDArray[np.float64] | None:
    """The values of a clean file, None for any other."""
    header = text.lines[0].encode() if has_header else b""
    if text.stray != header.translate(None, NUMERIC):
        return None
    lines = text.lines[1:] if has_header else text.lines
    delimiter = None if layout.separator == BLANKS else layout.separator
    try:
        values = np.loadtxt(lines, dtype=np.float64, delimiter=delimiter, comments=None, ndmin=2)
    except ValueError:
        return None
    clean = values.shape == (len(lines), len(layout.headers)) and bool(np.isfinite(values).all())
    return values if clean else None


def _read_exactly(text: TextLines, layout: _Layout, has_header: bool) -> NDArray[np.float64]:
    """The values cell by cell, or the first fault."""
    width = len(layout.headers)
    values = array("d")
    for index in range(int(has_header), len(text.lines)):
        cells = cells_of(text.lines[index], layout.separator)
        if len(cells) != width:
            raise _ragged(len(cells), int(text.numbers[index]), layout)
        for column, cell in enumerate(cells):
            value = number_in(cell)
            if value is None:
                fault = cell_fault(cell)
                fault.file, fault.line = layout.file_name, int(text.numbers[index])
                fault.column, fault.column_name = column + 1, layout.headers[column]
                raise fault
            values.append(value)
    return np.array(values, dtype=np.float64).reshape(-1, width)


def _ragged(cells: int, line: int, layout: _Layout) -> UserError:
    """The refusal of a row whose number of cells is not the first line's."""
    width = len(layout.headers)
    reason = f"{cells} {'cell' if cells == 1 else 'cells'} where line {layout.first_line} has {width}"
    remedy = "Give every row the same columns"
    if layout.separator == "," and cells == 2 * width:
        remedy = "If these are decimal commas, write decimal points"
    return UserError("ragged-row", reason, remedy, layout.file_name, line)
