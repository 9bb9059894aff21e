"""Misfit by scale: p_k of a curve against the width of the features that it counts."""

from fits.reports import numbers
from fits.reports.figures import palette
from fits.reports.figures.figure import (
    NARROW,
    Choice,
    Dash,
    Figure,
    Layer,
    Line,
    Marker,
    Panel,
    Place,
    Points,
    Table,
    log_axis,
    values,
)
from fits.reports.snapshot import Snapshot

SMALLEST_DRAWN = 1e-12


def scales(snapshot: Snapshot, *, level: str, curve: str) -> Figure:
    """p_k against feature width, for the chosen curve."""
    layers: list[Layer] = []
    widths: list[float] = []
    heights: list[float] = []
    rows: list[tuple[str | float | int, ...]] = []
    unit = snapshot.x_unit
    for index, verdict in enumerate(snapshot.curves):
        name = verdict["name"]
        scale = snapshot.drawing(name)["scales"]
        width, p = values(scale["wider_than"]), values(scale["p_value"])
        colour = palette.curve_colour(index)
        shown = tuple(max(value, SMALLEST_DRAWN) for value in p)
        widths += width
        heights += shown
        layers.append(
            Line(
                label=name,
                colour=colour,
                curve=name,
                choice=Choice.ONE,
                x=width,
                y=shown,
                marker=Marker.DOT,
                thickness=1.2,
            )
        )
        worst = verdict["scales"]["worst"]
        words = f"worst: {numbers.width(worst['wider_than'], unit=unit, log=snapshot.on_log_axis)}"
        layers.append(
            Points(
                label="worst scale",
                colour=colour,
                curve=name,
                choice=Choice.ONE,
                x=(float(worst["wider_than"]),),
                y=(max(float(worst["p_value"]), SMALLEST_DRAWN),),
                marker=Marker.CIRCLE,
                size=9.0,
                words=(words,),
                place=Place.LEFT
                if float(worst["wider_than"]) ** 2 > max(width) * min(width)
                else Place.RIGHT,
            )
        )
        rows += [(name, *row) for row in zip(scale["functions"], width, p, strict=True)]
    # Keeps 1 in sight, so that a curve that fails at every scale does not look like one that passes.
    layers.append(
        Line(
            colour=palette.GUIDE, x=(min(widths), max(widths)), y=(1.0, 1.0), dash=Dash.DOTTED, thickness=0.8
        )
    )
    label = "of ln x" if snapshot.on_log_axis else f"({unit})" if unit else ""
    return Figure(
        name="scales",
        title="Misfit by scale",
        caption=(
            "For each width, the chance of a misfit at least as large in all features wider than that, if the "
            "curve were true. The lowest point is the worst scale. Many scales are looked at, so the lowest p "
            "is not to be read alone: the scale p-value in the table accounts for that. "
            "Values below 10⁻¹² are drawn there."
        ),
        x=log_axis(f"features wider than {label}".strip(), tuple(widths)),
        panels=(Panel(log_axis("p-value of the misfit", tuple(heights))),),
        layers=tuple(layers),
        table=Table(("curve", "functions", "features wider than", "p-value"), tuple(rows)),
        level=level,
        curve=curve,
        width=NARROW,
        height=3.0,
    )
