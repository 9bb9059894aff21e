"""A table whose columns are known turned into data for the engine."""

from collections.abc import Mapping, Sequence

from core.measurements.reading.roles import MAP_THEM, SHARED, problems_of_roles
from core.measurements.reading.table import Table
from core.measurements.reading.windows import windows_of
from core.user_error import UserError
from fits.engine.data import Axis, Data, ErrorSource, FloatArray, validated_data
from fits.engine.refusal import InputRefused

ROLE_OF_FIELD = {"x": "x", "y": "y", "errors": "error", "low": "lo", "high": "hi"}


def release_data(
    table: Table,
    roles: Sequence[str],
    *,
    axis: Axis = Axis.LINEAR,
    source: ErrorSource = ErrorSource.GIVEN,
    covariance: FloatArray | None = None,
    covariance_name: str = "",
    standard_errors: FloatArray | None = None,
    calibration: float = 0.0,
    windows: FloatArray | None = None,
    windows_name: str = "",
) -> Data:
    """The release's points, every rule of them checked; a broken one is named by line and column.

    standard_errors  take the place of an error column
    windows          grid and weights, shape (n + 1, g)
    """
    if len(roles) != len(table.headers):
        reason = f"{len(roles)} columns are marked of {len(table.headers)}"
        raise UserError("columns-unmapped", reason, MAP_THEM, table.file_name)
    problems = problems_of_roles(roles, table.file_name)
    if problems:
        raise problems[0]
    columns = {role: table.values[:, index] for index, role in enumerate(roles) if role}
    low, high = columns.get("lo"), columns.get("hi")
    x = columns.get("x")
    if x is None:
        assert low is not None
        assert high is not None
        x = low / 2.0 + high / 2.0
    try:
        return validated_data(
            x,
            columns["y"],
            axis=axis,
            source=source,
            errors=columns.get("error") if standard_errors is None else standard_errors,
            covariance=covariance,
            shared={
                role[len(SHARED) :]: column for role, column in columns.items() if role.startswith(SHARED)
            },
            calibration=calibration,
            low=low,
            high=high,
            windows=None if windows is None else windows_of(windows),
        )
    except InputRefused as refusal:
        names = {"covariance": covariance_name, "windows": windows_name}
        raise refused_in_table(refusal, table, roles, names) from refusal


def refused_in_table(
    refusal: InputRefused, table: Table, roles: Sequence[str], file_names: Mapping[str, str] | None = None
) -> UserError:
    """The engine's refusal with the file, line and column that it stems from.

    file_names  field → the file of its own that it was given in
    """
    own_file = (file_names or {}).get(refusal.field.removesuffix(":grid"))
    if own_file is not None:
        return UserError(refusal.code, refusal.reason, refusal.remedy, own_file or table.file_name)
    line = None if refusal.index is None else int(table.lines[refusal.index])
    fault = UserError(refusal.code, refusal.reason, refusal.remedy, table.file_name, line)
    role = ROLE_OF_FIELD.get(refusal.field, refusal.field)
    if role in roles and refusal.code != "too-few-points":
        index = list(roles).index(role)
        fault.column, fault.column_name = index + 1, table.headers[index]
    return fault
