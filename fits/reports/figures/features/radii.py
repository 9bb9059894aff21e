"""What charts of prices have in common: the radii as lines across, each level with a dash of its own."""

from collections.abc import Sequence

from fits.reports import numbers
from fits.reports.features.document import Features
from fits.reports.figures import palette
from fits.reports.figures.figure import Axis, Dash, Layer, LevelLine, Line, Marker, Place, Points

# From the lowest level to the highest: the widest region has the whole line.
DASHES = (Dash.DOTTED, Dash.DASH_DOTTED, Dash.DASHED, Dash.SOLID)
# Prices are drawn up to this multiple of the largest radius.
TOP = 2.2


def dash_of(features: Features, level: str) -> Dash:
    """The dash of a level, from the highest down."""
    return DASHES[-1 - (len(features.levels) - 1 - features.levels.index(level)) % len(DASHES)]


def radius_lines(features: Features, ends: tuple[float, float]) -> list[Layer]:
    """A line across for each level's radius; that of the chosen level is named."""
    layers: list[Layer] = []
    for level in features.levels:
        radius, words = features.radius(level), numbers.level_words(level)
        layers.append(
            LevelLine(
                label=f"radius at {words}",
                colour=palette.INK,
                level=level,
                x=ends,
                y=(radius, radius),
                dash=dash_of(features, level),
            )
        )
        layers.append(
            Points(
                colour=palette.INK,
                level=level,
                x=(ends[1],),
                y=(radius,),
                marker=Marker.NONE,
                words=(words,),
                place=Place.ABOVE_LEFT,
            )
        )
    return layers


def price_axis(features: Features) -> Axis:
    """Prices as far as they matter: what is dearer is out of every ball."""
    top = TOP * features.largest_radius
    return Axis("price, in error bars", range=(-0.04 * top, top) if top > 0.0 else None)


def price_lines(
    x: Sequence[float], price: Sequence[float | None], *, label: str, colour: str, thickness: float = 2.0
) -> list[Line]:
    """A price along x; where there is no number the line is broken."""
    pieces: list[list[tuple[float, float]]] = [[]]
    for place, value in zip(x, price, strict=True):
        if value is None:
            pieces.append([])
        else:
            pieces[-1].append((float(place), float(value)))
    kept = [piece for piece in pieces if piece]
    return [
        Line(
            label=label,
            colour=colour,
            x=tuple(at for at, _ in piece),
            y=tuple(value for _, value in piece),
            thickness=thickness,
            # A single price between two unknown ones would be a line of no length.
            marker=Marker.DOT if len(piece) == 1 else Marker.NONE,
        )
        for piece in kept
    ]
