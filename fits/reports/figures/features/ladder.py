"""The price of at most 0, 1, 2, … peaks, from its lower to its upper bound, against the radii."""

from collections.abc import Sequence

from fits.reports import numbers
from fits.reports.features.document import Features, Kind, Standing, Step
from fits.reports.figures import palette
from fits.reports.figures.features.radii import TOP, price_axis, radius_lines
from fits.reports.figures.figure import (
    NARROW,
    Axis,
    Cell,
    Figure,
    Layer,
    Line,
    Marker,
    Panel,
    Place,
    Points,
    Table,
)
from fits.reports.snapshot import Snapshot

MARKS = {
    Standing.RULED_OUT: (Marker.CROSS, palette.OUTSIDE),
    Standing.UNDECIDED: (Marker.DOT, palette.GUIDE),
    Standing.POSSIBLE: (Marker.CIRCLE, palette.INSIDE),
}


def ladder(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """How few peaks will do."""
    return _ladder(snapshot, level, Kind.PEAK, "ladder")


def dip_ladder(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """How few dips will do."""
    return _ladder(snapshot, level, Kind.DIP, "dip_ladder")


def _ladder(snapshot: Snapshot, level: str, kind: Kind, name: str) -> Figure | None:
    features = Features.of(snapshot)
    steps = features.steps(kind) if features else ()
    if features is None or not steps:
        return None
    top = TOP * features.largest_radius
    ends = (-0.6, steps[-1].at_most + 0.6)
    layers = [*radius_lines(features, ends), *(_bounds(step, top) for step in steps)]
    for key in features.levels:
        layers += _marks(steps, features.radius(key), key, top)
    layers += [_beyond(step, top) for step in steps if top and step.lower > top]
    return Figure(
        name=name,
        title=f"Price of at most so many {kind}s",
        caption=(
            f"How far from the fit the nearest curve with at most so many {kind}s lies: no nearer than the lower end, "
            "and no further than the upper end, where one was found; prices beyond the chart are written at its top. "
            "Cross: ruled out at the chosen level, so that "
            "more are demanded. Circle: possible. Grey dots on either side of the radius: undecided."
        ),
        x=Axis(f"at most so many {kind}s", ticks=tuple(float(s.at_most) for s in steps), range=ends),
        panels=(Panel(_axis(features, steps)),),
        layers=tuple(layers),
        table=_table(features, steps, kind),
        level=level,
        has_key=True,
        width=NARROW,
        height=3.4,
    )


def _axis(features: Features, steps: Sequence[Step]) -> Axis:
    axis = price_axis(features)
    # Without a radius there is no scale but that of the prices themselves.
    return axis if axis.range else Axis(axis.label)


def _bounds(step: Step, top: float) -> Line:
    """From bound to bound; where no curve was found, to the top of the chart."""
    upper = step.upper if step.upper is not None else max(top, step.lower)
    at = float(step.at_most)
    return Line(colour=palette.GUIDE, x=(at, at), y=(step.lower, upper), thickness=3.0)


def _marks(steps: Sequence[Step], radius: float, level: str, top: float) -> list[Layer]:
    layers: list[Layer] = []
    for standing, (marker, colour) in MARKS.items():
        at: list[tuple[float, float]] = []
        for step in steps:
            if step.standing(radius) is standing:
                at += [(float(step.at_most), price) for price in _ends(step, standing)]
        # What is far beyond is named at the edge instead.
        shown = [(k, price) for k, price in at if not top or price <= top]
        if shown:
            layers.append(
                Points(
                    label=str(standing),
                    colour=colour,
                    level=level,
                    x=tuple(k for k, _ in shown),
                    y=tuple(price for _, price in shown),
                    marker=marker,
                    size=7.0 if standing is not Standing.UNDECIDED else 5.0,
                )
            )
    return layers


def _ends(step: Step, standing: Standing) -> list[float]:
    """The bound that decides; where it is undecided, both."""
    if standing is Standing.RULED_OUT:
        return [step.lower]
    upper = [] if step.upper is None else [step.upper]
    return upper if standing is Standing.POSSIBLE else [step.lower, *upper]


def _beyond(step: Step, top: float) -> Points:
    words = f"{numbers.significant(step.lower, 2)} ↑"
    return Points(
        colour=palette.OUTSIDE,
        x=(float(step.at_most),),
        # In two rows: side by side they would run into one another.
        y=(top if step.at_most % 2 == 0 else 0.92 * top,),
        marker=Marker.NONE,
        words=(words,),
        place=Place.BELOW,
    )


def _table(features: Features, steps: Sequence[Step], kind: Kind) -> Table:
    columns = (
        f"at most so many {kind}s",
        "price at least",
        "a curve found at",
        "more demanded up to",
        *(f"at {numbers.level_words(key)}" for key in features.levels),
    )
    rows: list[tuple[Cell, ...]] = [
        (
            step.at_most,
            step.lower,
            "none" if step.upper is None else step.upper,
            numbers.entry_level(step.demanded_level),
            *(str(step.standing(features.radius(key))) for key in features.levels),
        )
        for step in steps
    ]
    return Table(columns, tuple(rows))
