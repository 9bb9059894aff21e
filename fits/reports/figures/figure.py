"""A figure as plain values, before it is drawn for the screen or for paper."""

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum

Values = tuple[float, ...]
Cell = str | float | int | bool | None


class Dash(StrEnum):
    """How a line is broken."""

    SOLID = "solid"
    DASHED = "dashed"
    DASH_DOTTED = "dash-dotted"
    DOTTED = "dotted"


class Marker(StrEnum):
    """The shape of a point."""

    DOT = "dot"
    CIRCLE = "circle"
    CROSS = "cross"
    NONE = "none"


class Place(StrEnum):
    """Where words stand beside their point."""

    ABOVE = "above"
    BELOW = "below"
    LEFT = "left"
    RIGHT = "right"
    ABOVE_LEFT = "above left"


class Choice(StrEnum):
    """When a layer of a curve is drawn: always, while that curve is switched on, or while it is the chosen one."""

    ALWAYS = "always"
    EACH = "each"
    ONE = "one"


@dataclass(frozen=True)
class Layer:
    """What all layers have.

    level   drawn only while this level is chosen; empty: always
    curve   the curve it belongs to; empty: none
    choice  when a layer of a curve is drawn
    inside  level → whether that curve is inside: inside is solid with circles, outside dashed with crosses
    panel   index of the panel, from the top
    """

    label: str = ""
    colour: str = "#000000"
    level: str = ""
    curve: str = ""
    choice: Choice = Choice.ALWAYS
    inside: Mapping[str, bool] = field(default_factory=dict)
    panel: int = 0


@dataclass(frozen=True)
class Points(Layer):
    """Single values, with errors or without. `words`, one for each, are written beside them."""

    x: Values = ()
    y: Values = ()
    error: Values = ()
    marker: Marker = Marker.DOT
    size: float = 5.0
    words: tuple[str, ...] = ()
    place: Place = Place.ABOVE


@dataclass(frozen=True)
class Line(Layer):
    """A line through values, in the order given."""

    x: Values = ()
    y: Values = ()
    dash: Dash = Dash.SOLID
    thickness: float = 1.6
    marker: Marker = Marker.NONE


@dataclass(frozen=True)
class LevelLine(Line):
    """A line that belongs to a level: always drawn, strongly while that level is chosen."""


@dataclass(frozen=True)
class Band(Layer):
    """What lies between two lines."""

    x: Values = ()
    lower: Values = ()
    upper: Values = ()
    opacity: float = 0.35


@dataclass(frozen=True)
class Ring(Layer):
    """A circle around the origin. The ring of the chosen level is drawn strongly."""

    radius: float = 0.0


@dataclass(frozen=True)
class Axis:
    """Label and kind of an axis. `ticks` are where it is labelled, if that is not left to the drawing."""

    label: str
    log: bool = False
    ticks: Values = ()
    range: tuple[float, float] | None = None


@dataclass(frozen=True)
class Panel:
    """One of the stacked plots that share x; `share` is its part of the height."""

    y: Axis
    share: float = 1.0


@dataclass(frozen=True)
class Table:
    """The numbers behind a figure."""

    columns: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]


NARROW = 4.7


@dataclass(frozen=True)
class Figure:
    """One chart: name (as in addresses), title, caption in plain words, panels, layers from back to front.

    level, curve  what is chosen
    switched_on   the curves that are drawn, of those that can be switched each
    has_key       whether the page says beside the chart what its lines and signs are
    """

    name: str
    title: str
    caption: str
    x: Axis
    panels: tuple[Panel, ...]
    layers: tuple[Layer, ...]
    table: Table
    level: str
    curve: str = ""
    switched_on: tuple[str, ...] = ()
    equal_aspect: bool = False
    has_key: bool = False
    width: float = (
        7.4  # inches; those that stand side by side are narrower, so that their words stay readable
    )
    height: float = 3.6

    def shows(self, layer: Layer) -> bool:
        """Whether a layer is drawn under what is chosen here."""
        if layer.level and layer.level != self.level and not isinstance(layer, (Ring, LevelLine)):
            return False
        if layer.choice is Choice.ONE and layer.curve != self.curve:
            return False
        return layer.choice is not Choice.EACH or layer.curve in self.switched_on or layer.curve == self.curve


def log_axis(label: str, shown: Values) -> Axis:
    """A logarithmic axis, labelled at powers of ten, or at 1, 2 and 5 where it is short."""
    low, high = math.log10(min(shown)), math.log10(max(shown))
    steps = (1.0, 2.0, 5.0) if high - low < 2.5 else (1.0,)
    every = max(1, round((high - low) / 6.0))
    powers = range(math.floor(low) - 1, math.ceil(high) + 2)
    ticks = (step * 10.0**power for power in powers if power % every == 0 for step in steps)
    return Axis(label, log=True, ticks=tuple(float(f"{tick:.1g}") for tick in ticks))


def tick_label(tick: float) -> str:
    """0.2, 1000, 10⁻⁶."""
    if 1e-4 < tick < 1e5:
        return f"{tick:g}"
    power = str(math.floor(math.log10(tick) + 0.5)).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
    return f"10{power}"


def values(numbers: object) -> Values:
    """A tuple of floats from any list of numbers."""
    assert isinstance(numbers, (list, tuple))
    return tuple(float(number) for number in numbers)
