"""A table whose first column is x and each other column a curve, named by its header.

A clean table is read at once. In any other the first fault of each column is found, and only that column is refused.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from core.measurements.reading.grammar import VALUE, cell_fault, number_in
from core.measurements.reading.limits import BATCH_TABLE, MAXIMUM_HEADER_LENGTH
from core.measurements.reading.names import visible
from core.measurements.reading.release import refused_in_table
from core.measurements.reading.separator import cells_of, names_of, separator_of
from core.measurements.reading.table import Table, read_table
from core.measurements.reading.text import text_lines
from core.user_error import UserError
from fits.engine.data import CurveTable, validated_curve
from fits.engine.refusal import InputRefused

IN_A_CELL = frozenset({"not-a-number", "decimal-comma", "infinite"})


@dataclass(frozen=True, eq=False)
class Column:
    """A curve of the table, read or refused; its number counts from 1."""

    name: str
    number: int
    curve: CurveTable | None = None
    fault: UserError | None = None


def columns_of(content: bytes, file_name: str) -> Iterator[Column]:
    """The curves from left to right. A UserError for what concerns them all: the layout, the x."""
    faults: dict[int, UserError] = {}
    try:
        table = read_table(content, file_name, limits=BATCH_TABLE)
    except UserError as error:
        if error.code not in IN_A_CELL:
            raise
        table, faults = _read_by_columns(content, file_name)
    if len(table.headers) < 2:
        reason = "has one column, so there is no curve in it"
        raise UserError(
            "no-curves", reason, "Give x in the first column and a curve in each other", file_name
        )
    for index in range(1, len(table.headers)):
        yield _column(table, index, faults.get(index))


def _column(table: Table, index: int, fault: UserError | None) -> Column:
    name, number = visible(table.headers[index]), index + 1
    if len(table.headers[index]) >= MAXIMUM_HEADER_LENGTH:
        reason = f"its name in the first line has {MAXIMUM_HEADER_LENGTH} characters or more"
        fault = UserError("name-too-long", reason, "Shorten it", column=number)
    if fault is not None:
        return Column(name, number, fault=fault)
    roles = ["x", *("y" if other == index else "" for other in range(1, len(table.headers)))]
    try:
        curve = validated_curve(name, table.values[:, 0], table.values[:, index])
    except InputRefused as refusal:
        refused = refused_in_table(refusal, table, roles)
        refused.file = ""
        return Column(name, number, fault=refused)
    return Column(name, number, curve=curve)


def _read_by_columns(content: bytes, file_name: str) -> tuple[Table, dict[int, UserError]]:
    """The table, and by its index the first fault of each column that has one. Its layout has been found in order
    up to a fault in a cell."""
    text = text_lines(content, file_name, BATCH_TABLE)
    separator = separator_of(text.lines)
    first = cells_of(text.lines[0], separator)
    # Unlike in other tables a name may begin like a number here, as long as that of x does not.
    has_header = VALUE.fullmatch(first[0]) is None
    headers = names_of(text.lines[0], separator) if has_header else [""] * len(first)
    start = int(has_header)
    values = np.full((len(text.lines) - start, len(headers)), np.nan)
    faults: dict[int, UserError] = {}
    for row, line in enumerate(text.lines[start:]):
        number = int(text.numbers[start + row])
        cells = cells_of(line, separator)
        if len(cells) != len(headers):
            reason = f"{len(cells)} cells where line {text.numbers[0]} has {len(headers)}"
            raise UserError("ragged-row", reason, "Give every row the same columns", file_name, number)
        for index, cell in enumerate(cells):
            if index in faults:
                continue
            value = number_in(cell)
            if value is not None:
                values[row, index] = value
                continue
            fault = cell_fault(cell)
            fault.line, fault.column, fault.column_name = number, index + 1, headers[index]
            if index == 0:
                fault.file = file_name
                raise fault
            faults[index] = fault
    return Table(file_name, tuple(headers), values, text.numbers[start:]), faults
