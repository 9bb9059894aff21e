"""Where each peak and dip can be, and how high, over the data."""

from fits.reports import numbers
from fits.reports.features.document import Feature, Features, Kind
from fits.reports.features.own import own_peaks
from fits.reports.figures import palette
from fits.reports.figures.features.contours import Outline, outlines
from fits.reports.figures.features.over_data import data_and_fit, x_axis
from fits.reports.figures.features.radii import dash_of
from fits.reports.figures.figure import (
    Axis,
    Cell,
    Choice,
    Figure,
    Layer,
    LevelLine,
    Marker,
    Panel,
    Place,
    Points,
    Table,
)
from fits.reports.snapshot import Snapshot

COLOURS = {Kind.PEAK: palette.PEAK, Kind.DIP: palette.DIP}


def regions(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """Contours of the price over location and height, at the radius of each level."""
    features = Features.of(snapshot)
    found = [feature for kind in Kind for feature in features.found(kind)] if features else []
    if features is None or not found:
        return None
    layers = data_and_fit(snapshot)
    rows: list[tuple[Cell, ...]] = []
    for feature in found:
        for key in features.levels:
            for line in _outlines(feature, features, key):
                layers.append(_contour(features, feature, key, line))
                rows += [(feature.name, float(key), *at) for at in zip(line.x, line.height, strict=True)]
        layers += _name(feature, features)
    layers += _theories(snapshot, features)
    return Figure(
        name="regions",
        title="Where peaks and dips can be, and how high",
        caption=(
            "Each outline holds every place and height at which some curve of the ball has its peak (or dip) of that "
            "window: exact, by one programme for each point of a map. One dash for each level, the chosen one strong. "
            "Circles and crosses: the highest peak (lowest dip) of the curve looked at in each window, inside and "
            "outside the location interval."
        ),
        x=x_axis(snapshot),
        panels=(Panel(Axis(snapshot.y_label)),),
        layers=tuple(layers),
        table=Table(("feature", "level", snapshot.x_label, snapshot.y_label), tuple(rows)),
        level=level,
        curve=curve,
        has_key=True,
        height=4.6,
    )


def _outlines(feature: Feature, features: Features, level: str) -> tuple[Outline, ...]:
    """Contours of the map; without a map, the box of the two intervals, which is never too small."""
    if feature.map is not None:
        return outlines(feature.map, features.radius(level))
    height = feature.height(level)
    if height is None:
        return ()
    low, high = height.low, height.high
    return tuple(
        Outline((part.low, part.high, part.high, part.low, part.low), (low, low, high, high, low))
        for part in feature.location(level)
    )


def _contour(features: Features, feature: Feature, level: str, line: Outline) -> LevelLine:
    return LevelLine(
        label=f"at {numbers.level_words(level)}",
        colour=COLOURS[feature.kind],
        level=level,
        x=line.x,
        y=line.height,
        dash=dash_of(features, level),
    )


def _name(feature: Feature, features: Features) -> list[Layer]:
    """The number of a feature, clear of its widest region."""
    key = features.levels[-1]
    height = feature.height(key)
    known = [(price, x) for x, price in feature.profile if price is not None]
    if height is None or not known or not feature.location(key):
        return []
    is_peak = feature.kind is Kind.PEAK
    return [
        Points(
            colour=COLOURS[feature.kind],
            x=(min(known)[1],),
            y=(height.high if is_peak else height.low,),
            marker=Marker.NONE,
            words=(str(feature.number) if is_peak else f"dip {feature.number}",),
            place=Place.ABOVE if is_peak else Place.BELOW,
        )
    ]


def _theories(snapshot: Snapshot, features: Features) -> list[Layer]:
    """The own peaks and dips of the curve looked at, as far as the regions speak of them."""
    layers: list[Layer] = []
    for kind in Kind:
        for theory in own_peaks(snapshot, features, kind):
            layers += [
                Points(
                    label=theory.name,
                    colour=palette.curve_colour(snapshot.names.index(theory.name)),
                    curve=theory.name,
                    choice=Choice.ONE,
                    inside=own.inside,
                    x=(own.x,),
                    y=(own.y,),
                    marker=Marker.CIRCLE,
                    size=6.0,
                )
                for own in theory.judged.values()
                if own.inside
            ]
    return layers
