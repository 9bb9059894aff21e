"""Data with errors, fit, band and theory curves; residuals in error bars below."""

from fits.reports import numbers
from fits.reports.figures import palette
from fits.reports.figures.figure import (
    Axis,
    Band,
    Choice,
    Dash,
    Figure,
    Layer,
    Line,
    Marker,
    Panel,
    Points,
    Table,
    Values,
    log_axis,
    values,
)
from fits.reports.snapshot import Snapshot

CURVES_SHOWN = 5  # further ones in rank start switched off


def curves(snapshot: Snapshot, *, level: str, curve: str) -> Figure:
    """The curve chart."""
    data, grid = snapshot.detail["data"], snapshot.detail["grid"]
    x, y, error, fit = (values(data[key]) for key in ("x", "y", "error", "fit"))
    layers: list[Layer] = [*_bands(snapshot), *_residual_guides(x)]
    layers.append(
        Points(label="data", colour=palette.DATA, x=x, y=y, error=error, size=3.6 if len(x) < 400 else 2.4)
    )
    rest = tuple((a - b) / s for a, b, s in zip(y, fit, error, strict=True))
    layers.append(Points(label="data − fit", colour=palette.GUIDE, panel=1, x=x, y=rest, size=3.0))
    layers += _theories(snapshot, y, error)
    layers.append(
        Line(label="fit", colour=palette.INK, x=values(grid["x"]), y=values(grid["fit"]), thickness=2.2)
    )
    thinned = " Every so many of the points are drawn; all of them were used." if data["thinned"] else ""
    return Figure(
        name="curves",
        title="Data, fit and theory curves",
        caption=(
            f"Above: data with their errors, the fit, and the band in which every curve of the {snapshot.radius_kind} "
            "ball at the chosen level lies, for all x at once. Solid curves are inside, dashed ones outside. Below, in "
            "error bars: data minus fit (grey) and data minus the curve looked at."
            + _scale(snapshot)
            + thinned
        ),
        x=log_axis(snapshot.x_label, x) if snapshot.on_log_axis else Axis(snapshot.x_label),
        panels=(Panel(Axis(snapshot.y_label), 0.7), Panel(Axis("in error bars"), 0.3)),
        layers=tuple(layers),
        table=_table(snapshot, x, y, error, fit),
        level=level,
        curve=curve,
        switched_on=snapshot.names[:CURVES_SHOWN],
        height=5.4,
    )


def _scale(snapshot: Snapshot) -> str:
    if snapshot.detail["data"].get("scale") != "stabilised counts":
        return ""
    return (
        " Counts v are drawn as 2√(v + 3/8), the scale on which they are judged and have errors of 1, and the fit and "
        "the curves as the mean of that."
    )


def _bands(snapshot: Snapshot) -> list[Band]:
    grid = snapshot.detail["grid"]
    x, fit, unit = (values(grid[key]) for key in ("x", "fit", "unit_band"))
    bands = []
    for level in snapshot.levels:
        radius = snapshot.radius(level)
        bands.append(
            Band(
                label=f"{numbers.level_words(level)} band",
                colour=palette.BAND,
                level=level,
                x=x,
                lower=tuple(f - radius * u for f, u in zip(fit, unit, strict=True)),
                upper=tuple(f + radius * u for f, u in zip(fit, unit, strict=True)),
            )
        )
    return bands


def _residual_guides(x: Values) -> list[Line]:
    ends = (min(x), max(x))
    return [
        Line(colour=palette.GUIDE, panel=1, x=ends, y=(at, at), dash=dash, thickness=0.8)
        for at, dash in ((-1.0, Dash.DOTTED), (0.0, Dash.SOLID), (1.0, Dash.DOTTED))
    ]


def _theories(snapshot: Snapshot, y: Values, error: Values) -> list[Layer]:
    layers: list[Layer] = []
    x = values(snapshot.detail["data"]["x"])
    for index, verdict in enumerate(snapshot.curves):
        name, colour = verdict["name"], palette.curve_colour(index)
        inside = snapshot.inside(verdict)
        drawing = snapshot.drawing(name)
        line = drawing["on_grid"]
        layers.append(
            Line(
                label=name,
                colour=colour,
                curve=name,
                choice=Choice.EACH,
                inside=inside,
                x=values(line["x"]),
                y=values(line["y"]),
            )
        )
        rest = zip(y, values(drawing["at_data"]), error, strict=True)
        layers.append(
            Points(
                label=f"data − {name}",
                colour=colour,
                curve=name,
                choice=Choice.ONE,
                inside=inside,
                panel=1,
                x=x,
                y=tuple((a - b) / s for a, b, s in rest),
                marker=Marker.CIRCLE,
                size=3.6,
            )
        )
    return layers


def _table(snapshot: Snapshot, x: Values, y: Values, error: Values, fit: Values) -> Table:
    names = snapshot.names
    at_data = [values(snapshot.drawing(name)["at_data"]) for name in names]
    return Table(
        (snapshot.x_label, snapshot.y_label, "error", "fit", *names),
        tuple(zip(x, y, error, fit, *at_data, strict=True)),
    )
