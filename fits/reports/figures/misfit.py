"""Where along x a curve fails: its smooth misfit, up to its worst scale, with a band."""

from fits.reports import numbers
from fits.reports.figures import palette
from fits.reports.figures.figure import (
    NARROW,
    Axis,
    Band,
    Choice,
    Dash,
    Figure,
    Layer,
    Line,
    Panel,
    Table,
    log_axis,
    values,
)
from fits.reports.snapshot import Snapshot


def misfit(snapshot: Snapshot, *, level: str, curve: str) -> Figure:
    """Σ (Z_j − β_mj) u_j(x) along x, for the chosen curve."""
    layers: list[Layer] = []
    label, grid = snapshot.x_label, values(snapshot.detail["grid"]["x"])
    rows: list[tuple[str | float, ...]] = []
    for index, name in enumerate(snapshot.names):
        found = snapshot.drawing(name)["misfit"]
        x, y, band = (values(found[key]) for key in ("x", "y", "band"))
        width = numbers.width(found["wider_than"], unit=snapshot.x_unit, log=snapshot.on_log_axis)
        layers.append(
            Band(
                label="if the curve were true (95 % scale set)",
                colour=palette.BAND,
                curve=name,
                choice=Choice.ONE,
                x=x,
                lower=tuple(-b for b in band),
                upper=band,
            )
        )
        layers.append(
            Line(
                curve=name,
                choice=Choice.ONE,
                colour=palette.GUIDE,
                x=(x[0], x[-1]),
                y=(0.0, 0.0),
                dash=Dash.DOTTED,
                thickness=1.0,
            )
        )
        layers.append(
            Line(
                label=f"data − {name}, features wider than {width}",
                colour=palette.curve_colour(index),
                curve=name,
                choice=Choice.ONE,
                x=x,
                y=y,
                thickness=2.0,
            )
        )
        rows += [(name, *row) for row in zip(x, y, band, strict=True)]
    return Figure(
        name="misfit",
        title="Smooth misfit along x",
        caption=(
            "Data minus curve, with everything finer than the curve's worst scale left out. Where the line leaves "
            "the band, the curve is off by more than the 95 % scale set allows; a curve can also be rejected for its "
            "misfit as a whole without leaving the band anywhere."
        ),
        x=log_axis(label, grid) if snapshot.on_log_axis else Axis(label),
        panels=(Panel(Axis(f"misfit, {snapshot.y_label}")),),
        layers=tuple(layers),
        table=Table(("curve", snapshot.x_label, "misfit", "band (±)"), tuple(rows)),
        level=level,
        curve=curve,
        width=NARROW,
        height=3.0,
    )
