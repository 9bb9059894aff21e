"""One chart on a page, with what stands behind it: drawing, table, files, and the key to its lines and signs."""

from dataclasses import dataclass
from typing import Protocol

from fits.reports import numbers
from fits.reports.figures.figure import (
    Band,
    Cell,
    Choice,
    Dash,
    Figure,
    Layer,
    LevelLine,
    Line,
    Marker,
    Points,
)

# Longer tables are shown in part; the CSV has all rows.
ROWS_SHOWN = 120
PIXELS_PER_INCH = 96
# Lengths of strokes and gaps in the key, as in the drawings.
STROKES = {Dash.SOLID: "", Dash.DASHED: "6 4", Dash.DASH_DOTTED: "6 3 1.6 3", Dash.DOTTED: "1.6 3"}


class ChartAddresses(Protocol):
    """Where the files of a chart are fetched from."""

    def chart(self, figure: Figure, form: str) -> str:
        """The chart as "svg" or "csv"."""


@dataclass(frozen=True)
class KeyEntry:
    """A line or sign of a chart and what it stands for. `level`: shown while this one is chosen; empty: always."""

    label: str
    colour: str
    shape: str  # line, circle, cross, dot or band
    strokes: str
    level: str
    is_shown: bool


@dataclass(frozen=True)
class Chart:
    """One chart with what stands behind it. width, height: about those of the drawing, in pixels, so that its place is
    kept until it arrives."""

    name: str
    title: str
    caption: str
    svg: str
    csv: str
    columns: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    rows_left_out: str
    width: int
    height: int
    key: tuple[KeyEntry, ...]


def chart_of(figure: Figure, addresses: ChartAddresses) -> Chart:
    """What a page shows of a figure."""
    rows = figure.table.rows
    stride = -(-len(rows) // ROWS_SHOWN)
    return Chart(
        name=figure.name,
        title=figure.title,
        caption=figure.caption,
        svg=addresses.chart(figure, "svg"),
        csv=addresses.chart(figure, "csv"),
        columns=figure.table.columns,
        rows=tuple(tuple(_cell(value) for value in row) for row in rows[:: max(1, stride)]),
        rows_left_out=f"One row in {stride} of {len(rows)}; the CSV has all." if stride > 1 else "",
        width=round(PIXELS_PER_INCH * figure.width),
        height=round(PIXELS_PER_INCH * figure.height),
        key=_key(figure) if figure.has_key else (),
    )


def _key(figure: Figure) -> tuple[KeyEntry, ...]:
    """Each label once for each level at which it is drawn. Layers of single curves are named by the caption."""
    entries: dict[tuple[str, str], KeyEntry] = {}
    for layer in figure.layers:
        if not layer.label or layer.choice is not Choice.ALWAYS:
            continue
        level = "" if isinstance(layer, LevelLine) else layer.level
        entry = KeyEntry(
            layer.label, layer.colour, _shape(layer), _strokes(layer), level, figure.shows(layer)
        )
        entries.setdefault((layer.label, level), entry)
    return tuple(entries.values())


def _shape(layer: Layer) -> str:
    if isinstance(layer, Points):
        return {Marker.CIRCLE: "circle", Marker.CROSS: "cross"}.get(layer.marker, "dot")
    return "band" if isinstance(layer, Band) else "line"


def _strokes(layer: Layer) -> str:
    return STROKES[layer.dash] if isinstance(layer, Line) else ""


def _cell(value: Cell) -> str:
    if isinstance(value, float):
        return numbers.significant(value, 4)
    return "" if value is None else str(value)
