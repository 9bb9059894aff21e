"""What each column of a table is: x, y, error, lo, hi, shared:NAME, or "" for a column that is not used."""

from collections.abc import Sequence

from core.measurements.reading.table import Table
from core.user_error import UserError

ROLES = ("x", "y", "error", "lo", "hi")
SHARED = "shared:"
UNUSED = ""

ROLE_OF_HEADER = {
    "x": "x",
    "y": "y",
    "error": "error",
    "errors": "error",
    "err": "error",
    "sigma": "error",
    "lo": "lo",
    "low": "lo",
    "hi": "hi",
    "high": "hi",
}
MAP_THEM = "Name the columns x, y and error (or lo and hi), or say what each one is"


def guess_roles(table: Table) -> tuple[str, ...]:
    """One role per column, by its header; without a header x, y and x, y, error by their place."""
    if not any(table.headers):
        by_place = {2: ("x", "y"), 3: ("x", "y", "error")}
        columns = len(table.headers)
        return by_place.get(columns, (UNUSED,) * columns)
    return tuple(role_of_header(header) for header in table.headers)


def problems_of_roles(roles: Sequence[str], file_name: str = "") -> list[UserError]:
    """What is unknown, double or missing; empty when the columns make a release."""
    problems = []
    for column, role in enumerate(roles, 1):
        if role != UNUSED and not is_role(role):
            reason = "is marked as something unknown"
            problems.append(UserError("role-unknown", reason, MAP_THEM, file_name, column=column))
        elif role != UNUSED and role in roles[: column - 1]:
            first = list(roles).index(role) + 1
            reason = f"is marked {role}, as column {first} is already"
            remedy = "Mark one of them, or neither as used"
            problems.append(UserError("columns-double", reason, remedy, file_name, column=column))
    if "y" not in roles:
        problems.append(UserError("columns-unmapped", "no column is marked y", MAP_THEM, file_name))
    if ("lo" in roles) != ("hi" in roles):
        there, missing = ("lo", "hi") if "lo" in roles else ("hi", "lo")
        reason = f"a column is marked {there} and none {missing}"
        problems.append(UserError("half-a-bin", reason, "Bins need both edges", file_name))
    elif "x" not in roles and "lo" not in roles:
        problems.append(UserError("columns-unmapped", "no column is marked x", MAP_THEM, file_name))
    return problems


def is_role(role: str) -> bool:
    """Whether this is a role that a column can have."""
    return role in ROLES or (role.startswith(SHARED) and bool(role.removeprefix(SHARED).strip()))


def role_of_header(header: str) -> str:
    """The role that a header names, UNUSED where it names none."""
    folded = header.strip().casefold()
    if folded.startswith(SHARED):
        name = header.strip()[len(SHARED) :].strip()
        return SHARED + name if name else UNUSED
    return ROLE_OF_HEADER.get(folded, UNUSED)
