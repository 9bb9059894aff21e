"""The ball seen from above: rings are the radii, each curve stands at its exact distance from the fit."""

import math
from dataclasses import dataclass

from fits.reports import numbers
from fits.reports.figures import palette
from fits.reports.figures.figure import Axis, Figure, Layer, Marker, Panel, Place, Points, Ring, Table
from fits.reports.snapshot import Document, Snapshot

FAR = 2.0  # in radii of the largest ring: what stands further out is named at the edge
MARGIN = 1.15
LETTER = 0.019  # width of a letter as a part of the width of the chart, on a narrow screen
LETTERS_HIGH = 2.5


def ball(snapshot: Snapshot, *, level: str, curve: str) -> Figure:
    """Rings at the calibrated radii, curves at their distances."""
    largest = max(snapshot.radius(key) for key in snapshot.levels)
    places = {name: _position(snapshot, name) for name in snapshot.names}
    reach = max((math.hypot(a, b) for a, b in places.values()), default=0.0)
    edge = MARGIN * (min(max(reach, largest), FAR * largest) if largest > 0.0 else reach) or 1.0
    layers: list[Layer] = [
        Ring(
            label=f"{numbers.level_words(key)} ring",
            colour=palette.INK,
            level=key,
            radius=snapshot.radius(key),
        )
        for key in snapshot.levels
    ]
    layers.append(Points(label="fit", colour=palette.INK, x=(0.0,), y=(0.0,), size=4.0))
    labels = _Labels(edge, list(places.values()))
    ranked = list(enumerate(snapshot.curves))
    # Names at the edge have the fewest sides to choose from.
    ranked.sort(key=lambda pair: not labels.is_far(*places[pair[1]["name"]]))
    drawn = {
        index: _curve(snapshot, verdict, palette.curve_colour(index), *places[verdict["name"]], labels)
        for index, verdict in ranked
    }
    for index in sorted(drawn):
        layers += drawn[index]
    return Figure(
        name="ball",
        title="The ball seen from above",
        caption=(
            "The centre is the fit. Rings are the calibrated radii; each curve stands at its exact distance from "
            "the fit, in error bars (root-mean-square). Circles are inside and crosses outside, by the exact "
            "p-value, which near a ring can differ from the ring. Angles are only a guide: curves in the same "
            "direction err alike. Curves too far out to be drawn are named at the edge, with their distance."
        ),
        x=Axis("distance, in error bars", range=(-edge, edge)),
        panels=(Panel(Axis("", range=(-edge, edge))),),
        layers=tuple(layers),
        table=_table(snapshot, places),
        level=level,
        curve=curve,
        equal_aspect=True,
        width=5.6,
        height=5.6,
    )


def _position(snapshot: Snapshot, name: str) -> tuple[float, float]:
    a, b = snapshot.drawing(name)["position"]
    return float(a), float(b)


def _curve(
    snapshot: Snapshot, verdict: Document, colour: str, a: float, b: float, labels: "_Labels"
) -> list[Layer]:
    name, inside = verdict["name"], snapshot.inside(verdict)
    # At the edge names are written towards the middle, so that they stay in the chart.
    is_far = labels.is_far(a, b)
    shrink = 0.96 * labels.edge / max(abs(a), abs(b)) if is_far else 1.0
    words = f"{name}, at {numbers.significant(verdict['distance'])}" if is_far else name
    at = (shrink * a, shrink * b)
    written = Points(
        label="",
        colour=colour,
        curve=name,
        x=(at[0],),
        y=(at[1],),
        marker=Marker.DOT if is_far else Marker.NONE,
        size=3.0 if is_far else 11.0,
        words=(words,),
        place=labels.place_for(words, *at),
    )
    point = Points(
        label=name, colour=colour, curve=name, inside=inside, x=(a,), y=(b,), marker=Marker.CIRCLE, size=8.0
    )
    return [point, written]


@dataclass
class _Labels:
    """Finds room for names, one after the other."""

    edge: float
    points: list[tuple[float, float]]

    def __post_init__(self) -> None:
        dot = 0.025 * self.edge
        self.taken = [(x - dot, y - dot, x + dot, y + dot) for x, y in [*self.points, (0.0, 0.0)]]

    def is_far(self, x: float, y: float) -> bool:
        """Whether a point lies outside the chart."""
        return max(abs(x), abs(y)) > self.edge

    def place_for(self, words: str, x: float, y: float) -> Place:
        """The first side on which the words stay inside the chart and clear of what is written already."""
        width = LETTER * 2.0 * self.edge * len(words)
        height = LETTER * 2.0 * self.edge * LETTERS_HIGH
        gap = 0.03 * self.edge
        boxes = {
            Place.ABOVE: (x - width / 2, y + gap, x + width / 2, y + gap + height),
            Place.BELOW: (x - width / 2, y - gap - height, x + width / 2, y - gap),
            Place.RIGHT: (x + gap, y - height / 2, x + gap + width, y + height / 2),
            Place.LEFT: (x - gap - width, y - height / 2, x - gap, y + height / 2),
        }
        place = min(boxes, key=lambda side: self._cost(boxes[side]))
        self.taken.append(boxes[place])
        return place

    def _cost(self, box: tuple[float, float, float, float]) -> float:
        left, low, right, high = box
        beyond = max(0.0, -self.edge - left, right - self.edge, -self.edge - low, high - self.edge)
        overlap = sum(
            max(0.0, min(right, other[2]) - max(left, other[0]))
            * max(0.0, min(high, other[3]) - max(low, other[1]))
            for other in self.taken
        )
        return beyond / self.edge + overlap / self.edge**2 * 10.0


def _table(snapshot: Snapshot, places: dict[str, tuple[float, float]]) -> Table:
    columns = (
        "curve",
        "distance",
        "across",
        "up",
        *(f"at {numbers.level_words(k)}" for k in snapshot.levels),
    )
    rows = []
    for verdict in snapshot.curves:
        inside = snapshot.inside(verdict)
        words = ["inside" if inside[key] else "outside" for key in snapshot.levels]
        rows.append((verdict["name"], float(verdict["distance"]), *places[verdict["name"]], *words))
    return Table(columns, tuple(rows))
