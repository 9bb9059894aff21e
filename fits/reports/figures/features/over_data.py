"""The data with their errors and the fit, as what lies behind regions and witnesses."""

from fits.reports.figures import palette
from fits.reports.figures.figure import Axis, Layer, Line, Points, log_axis, values
from fits.reports.snapshot import Snapshot


def data_and_fit(snapshot: Snapshot) -> list[Layer]:
    """Points in a lighter grey than where they are the matter itself, and the fit."""
    data, grid = snapshot.detail["data"], snapshot.detail["grid"]
    x, y, error = (values(data[key]) for key in ("x", "y", "error"))
    return [
        Points(label="data", colour=palette.ERROR, x=x, y=y, error=error, size=3.0 if len(x) < 400 else 2.0),
        Line(label="fit", colour=palette.INK, x=values(grid["x"]), y=values(grid["fit"]), thickness=1.4),
    ]


def x_axis(snapshot: Snapshot) -> Axis:
    """The x of the data."""
    if snapshot.on_log_axis:
        return log_axis(snapshot.x_label, values(snapshot.detail["data"]["x"]))
    return Axis(snapshot.x_label)


def x_ends(snapshot: Snapshot) -> tuple[float, float]:
    """From where to where the data reach."""
    grid = snapshot.detail["grid"]["x"]
    return float(grid[0]), float(grid[-1])
