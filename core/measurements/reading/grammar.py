"""What counts as a number, and what is said of a cell that does not."""

import math
import re

from core.measurements.reading.names import shown
from core.user_error import UserError

# Narrower than float(): no underscores, no other alphabets' digits, no words.
NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
DECIMAL_COMMA = re.compile(r"[+-]?[0-9]+,[0-9]+(?:[eE][+-]?[0-9]+)?")
INFINITE = re.compile(r"[+-]?inf(?:inity)?", re.IGNORECASE)
# A cell that was meant as a value, even if it is no number: it never makes a line a header.
VALUE = re.compile(r"[=@].*|[+-]?(?:\.?[0-9]\S*|inf|infinity|nan)", re.IGNORECASE | re.DOTALL)


def number_in(cell: str) -> float | None:
    """The finite number that the cell holds, None where it holds none."""
    if NUMBER.fullmatch(cell) is None:
        return None
    value = float(cell)
    return value if math.isfinite(value) else None


def cell_fault(cell: str) -> UserError:
    """Why a cell for which `number_in` is None holds no number; its place is the caller's to add."""
    if cell == "":
        return UserError("not-a-number", "the cell is empty", "Give a number or leave the row out")
    if DECIMAL_COMMA.fullmatch(cell):
        remedy = f"Write decimal points: {cell.replace(',', '.')[:40]}"
        return UserError("decimal-comma", f"{shown(cell)} has a decimal comma", remedy)
    if INFINITE.fullmatch(cell) or NUMBER.fullmatch(cell):
        return UserError(
            "infinite", f"{shown(cell)} is infinite", "Give a finite number or leave the row out"
        )
    return UserError(
        "not-a-number",
        f"{shown(cell)} is not a number",
        "Give numbers such as 1.5 or 2e-3; only the first line may hold names, and # starts a comment",
    )
