"""Each peak's place against the distance to the next: evenly spaced peaks lie on one level line."""

from itertools import pairwise

from fits.reports import numbers
from fits.reports.features.document import Feature, Features, Interval, Kind
from fits.reports.figures import palette
from fits.reports.figures.features.radii import dash_of
from fits.reports.figures.figure import (
    Axis,
    Cell,
    Dash,
    Figure,
    Layer,
    LevelLine,
    Line,
    Marker,
    Panel,
    Place,
    Points,
    Table,
)
from fits.reports.snapshot import Snapshot


def neighbours(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """Of every two peaks that follow one another."""
    features = Features.of(snapshot)
    peaks = features.found(Kind.PEAK) if features else ()
    if features is None or len(peaks) < 2:
        return None
    layers: list[Layer] = []
    rows: list[tuple[Cell, ...]] = []
    pairs = list(pairwise(peaks))
    for first, second in pairs:
        layers += _samples(first, second)
    for first, second in pairs:
        for key in features.levels:
            layers += _boxes(features, first, second, key, rows)
        layers += _name(first, second, features.levels[-1])
    layers += _even(features)
    unit = f" ({snapshot.x_unit})" if snapshot.x_unit else ""
    return Figure(
        name="neighbours",
        title="From one peak to the next",
        caption=(
            "Across: where a peak can be; up: how far it is to the next one. The outlines are made of both location "
            "intervals, at each level. Evenly spaced peaks all lie on one level line: the dashed line is the spacing "
            "with the lowest price. Dots: peaks of curves drawn from the ball, which show how the two "
            "places go together, not how far they reach."
        ),
        x=Axis(f"location of a peak{unit}"),
        panels=(Panel(Axis(f"distance to the next{unit}")),),
        layers=tuple(layers),
        table=Table(
            ("pair", "level", "first from", "first to", "second from", "second to", "apart from", "apart to"),
            tuple(rows),
        ),
        level=level,
        has_key=True,
        height=3.6,
    )


def _boxes(
    features: Features, first: Feature, second: Feature, level: str, rows: list[tuple[Cell, ...]]
) -> list[LevelLine]:
    """Outlines of all that the two intervals allow: the distance is x₂ − x₁."""
    drawn = []
    for one in first.location(level):
        for two in second.location(level):
            corners = ((one.low, two.low), (one.high, two.low), (one.high, two.high), (one.low, two.high))
            closed = (*corners, corners[0])
            drawn.append(
                LevelLine(
                    label=f"at {numbers.level_words(level)}",
                    colour=palette.PEAK,
                    level=level,
                    x=tuple(x for x, _ in closed),
                    y=tuple(after - x for x, after in closed),
                    dash=dash_of(features, level),
                )
            )
            ends = one.low, one.high, two.low, two.high
            rows.append((_pair(first, second), float(level), *ends, two.low - one.high, two.high - one.low))
    return drawn


def _pair(first: Feature, second: Feature) -> str:
    return f"{first.number} to {second.number}"


def _name(first: Feature, second: Feature, level: str) -> list[Points]:
    one, two = first.location(level), second.location(level)
    if not one or not two:
        return []
    whole = Interval(one[0].low, one[-1].high)
    return [
        Points(
            colour=palette.PEAK,
            x=(whole.low,),
            y=(two[-1].high - whole.low,),
            marker=Marker.NONE,
            words=(_pair(first, second),),
            place=Place.ABOVE,
        )
    ]


def _samples(first: Feature, second: Feature) -> list[Points]:
    """Tops of the same drawn curves, where both peaks have them."""
    one, two = (peak.samples["tops"] if peak.samples else [] for peak in (first, second))
    if not one or len(one) != len(two):
        return []
    places = [(float(a[0]), float(b[0])) for a, b in zip(one, two, strict=True)]
    return [
        Points(
            label="curves drawn from the ball",
            colour=palette.ERROR,
            x=tuple(a for a, _ in places),
            y=tuple(b - a for a, b in places),
            size=1.6,
        )
    ]


def _even(features: Features) -> list[Layer]:
    """The spacing of the nearest evenly spaced series, across all peaks."""
    found, peaks = features.spacing, features.found(Kind.PEAK)
    known = (
        [(price, at) for at, price in zip(found["spacing"], found["price"], strict=True) if price is not None]
        if found
        else []
    )
    if found is None or not known:
        return []
    _, spacing = min(known)
    ends = peaks[0].window.low, peaks[-1].window.low
    layers: list[Layer] = []
    for level in features.levels:
        verdict = "not ruled out" if found["interval"][level] else "rejected"
        label = f"evenly spaced ({verdict} at {numbers.level_words(level)})"
        layers.append(
            Line(
                label=label,
                colour=palette.OUTSIDE,
                level=level,
                x=ends,
                y=(spacing, spacing),
                dash=Dash.DASHED,
            )
        )
    return layers
