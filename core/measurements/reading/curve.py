"""A theory's curve read from text."""

from core.measurements.reading.release import refused_in_table
from core.measurements.reading.roles import guess_roles
from core.measurements.reading.table import Table, read_table
from core.user_error import UserError
from fits.engine.data import CurveTable, validated_curve
from fits.engine.refusal import InputRefused


def read_curve(content: bytes, file_name: str, name: str) -> CurveTable:
    """The curve in a file of two columns, or of more among which a header names x and y."""
    table = read_table(content, file_name)
    roles = _curve_roles(table)
    x, y = table.values[:, roles.index("x")], table.values[:, roles.index("y")]
    try:
        return validated_curve(name, x, y)
    except InputRefused as refusal:
        raise refused_in_table(refusal, table, roles) from refusal


def _curve_roles(table: Table) -> tuple[str, ...]:
    """Which column is x and which is y; of two columns x comes first unless their names say otherwise."""
    roles = guess_roles(table)
    named = len(roles) == 2 or any(table.headers)
    if named and roles.count("x") == roles.count("y") == 1:
        return roles
    if len(roles) == 2 and "" in roles and set(roles) <= {"x", "y", ""}:
        return ("y", "x") if roles[0] == "y" or roles[1] == "x" else ("x", "y")
    columns = f"{len(roles)} column{'' if len(roles) == 1 else 's'}"
    reason = f"{columns}, of which none or several are named x and y"
    raise UserError(
        "columns-unmapped", reason, "Give two columns, x and y, or name them in a header", table.file_name
    )
