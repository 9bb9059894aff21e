"""A figure as SVG for print and for pages without scripts. The same figure gives the same bytes."""

import io
import math
from collections.abc import Iterable
from typing import Any

import matplotlib as mpl
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.axis import XAxis, YAxis
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure as Canvas
from matplotlib.patches import Circle
from matplotlib.ticker import FixedLocator, FuncFormatter, NullFormatter

from fits.reports.figures import palette
from fits.reports.figures.figure import (
    Axis,
    Band,
    Dash,
    Figure,
    Layer,
    LevelLine,
    Line,
    Marker,
    Place,
    Points,
    Ring,
    Values,
    tick_label,
)

DASHES = {
    Dash.SOLID: "-",
    Dash.DASHED: (0, (5, 2.4)),
    Dash.DOTTED: (0, (1.2, 2)),
    Dash.DASH_DOTTED: (0, (5, 2, 1.2, 2)),
}
MARKERS = {Marker.DOT: "o", Marker.CIRCLE: "o", Marker.CROSS: "X"}
STYLE: Any = {
    "svg.fonttype": "none",  # text stays text: selectable, and small
    "svg.hashsalt": "inradius",
    # Comes with matplotlib: the same bytes on every machine, and it has every sign that we use.
    "font.family": ["sans-serif"],
    "font.sans-serif": ["DejaVu Sans"],
    "font.size": 9.0,
    "axes.edgecolor": palette.GUIDE,
    "axes.labelcolor": palette.INK,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "xtick.color": palette.INK,
    "ytick.color": palette.INK,
    "axes.unicode_minus": True,
    "text.parse_math": False,  # names are shown as they are written
    "path.simplify": True,
}
PLACES = {
    Place.ABOVE: ((0, 6), "center", "bottom"),
    Place.BELOW: ((0, -6), "center", "top"),
    Place.LEFT: ((-7, 0), "right", "center"),
    Place.RIGHT: ((7, 0), "left", "center"),
    Place.ABOVE_LEFT: ((-1, 2), "right", "bottom"),
}
LETTERS_PER_INCH = 14.0  # in the legend
LEGEND_ROWS = 0.22  # inches a row


def svg(figure: Figure) -> str:
    """The figure under the level and curve that it has chosen."""
    with mpl.rc_context(STYLE):
        keys = _legend_keys(figure)
        longest = max(map(len, keys.values()), default=1)
        columns = max(1, min(3, int(figure.width * LETTERS_PER_INCH / (longest + 6))))
        rows = math.ceil(len(keys) / columns)
        height = figure.height + rows * LEGEND_ROWS
        canvas = Canvas(figsize=(figure.width, height), layout="constrained")
        FigureCanvasSVG(canvas)
        canvas.set_facecolor("none")
        axes = canvas.subplots(
            len(figure.panels),
            1,
            sharex=True,
            squeeze=False,
            gridspec_kw={"height_ratios": [panel.share for panel in figure.panels]},
        )[:, 0]
        for axis, panel in zip(axes, figure.panels, strict=True):
            _prepare(axis, panel.y)
        _set_x(axes[-1], figure)
        for layer in figure.layers:
            if figure.shows(layer):
                _draw(axes[layer.panel], layer, figure)
        if figure.equal_aspect:
            axes[0].set_aspect("equal")
            axes[0].tick_params(labelleft=False)
        if keys:
            handles, labels = _legend(axes, keys)
            canvas.legend(
                handles, labels, loc="outside lower center", ncols=columns, frameon=False, fontsize=8.5
            )
        out = io.StringIO()
        canvas.savefig(out, format="svg", metadata={"Date": None, "Creator": None, "Title": figure.title})
    return out.getvalue()


def _legend_keys(figure: Figure) -> dict[str, str]:
    """Label of a layer → how the legend names it, for what is not named where it stands."""
    keys = {}
    for layer in figure.layers:
        named_there = isinstance(layer, Ring) or (isinstance(layer, Points) and layer.words)
        if layer.label and figure.shows(layer) and not named_there:
            word = layer.inside.get(figure.level)
            end = "" if word is None or layer.panel else f" ({'inside' if word else 'outside'})"
            keys[layer.label] = f"{layer.label}{end}"
    # In the ball every curve is named where it stands.
    return keys if len(keys) > 1 and not figure.equal_aspect else {}


def _legend(axes: Iterable[Axes], keys: dict[str, str]) -> tuple[list[Artist], list[str]]:
    found: dict[str, Artist] = {}
    for axis in axes:
        for handle, label in zip(*axis.get_legend_handles_labels(), strict=True):
            if label in keys:
                found.setdefault(label, handle)
    return list(found.values()), [keys[label] for label in found]


def _prepare(axis: Axes, y: Axis) -> None:
    axis.grid(color=palette.GRID, linewidth=0.6)
    axis.set_axisbelow(True)
    axis.set_facecolor("none")
    axis.set_ylabel(y.label)
    if y.log:
        axis.set_yscale("log")
        _label(axis.yaxis, y.ticks)
    elif y.ticks:
        axis.yaxis.set_major_locator(FixedLocator(y.ticks))
    if y.range:
        axis.set_ylim(*y.range)


def _set_x(axis: Axes, figure: Figure) -> None:
    axis.set_xlabel(figure.x.label)
    if figure.x.log:
        axis.set_xscale("log")
        _label(axis.xaxis, figure.x.ticks)
    elif figure.x.ticks:
        axis.xaxis.set_major_locator(FixedLocator(figure.x.ticks))
    if figure.x.range:
        axis.set_xlim(*figure.x.range)


def _label(axis: XAxis | YAxis, ticks: Values) -> None:
    """Plain numbers: matplotlib's powers of ten would need its TeX parser, which is off."""
    axis.set_major_locator(FixedLocator(ticks))
    axis.set_major_formatter(FuncFormatter(lambda tick, _: tick_label(tick)))
    axis.set_minor_formatter(NullFormatter())


def _draw(axis: Axes, layer: Layer, figure: Figure) -> None:
    label = layer.label or "_nolegend_"
    outside = layer.inside.get(figure.level) is False
    match layer:
        case Points():
            _draw_points(axis, layer, label, Marker.CROSS if outside else layer.marker)
        case Line():
            axis.plot(
                layer.x,
                layer.y,
                color=layer.colour,
                linewidth=_thickness(layer, figure),
                linestyle=DASHES[Dash.DASHED if outside else layer.dash],
                marker="" if layer.marker is Marker.NONE else MARKERS[layer.marker],
                markersize=3.2,
                label=label,
            )
        case Band():
            axis.fill_between(
                layer.x,
                layer.lower,
                layer.upper,
                color=layer.colour,
                alpha=layer.opacity,
                linewidth=0,
                label=label,
            )
        case Ring():
            _draw_ring(axis, layer, chosen=layer.level == figure.level)


def _thickness(layer: Line, figure: Figure) -> float:
    if isinstance(layer, LevelLine):
        return 2.0 if layer.level == figure.level else 0.9
    return layer.thickness


def _draw_points(axis: Axes, layer: Points, label: str, marker: Marker) -> None:
    if layer.error:
        axis.errorbar(
            layer.x,
            layer.y,
            yerr=layer.error,
            fmt="none",
            ecolor=palette.ERROR,
            elinewidth=0.8,
            label="_nolegend_",
        )
    axis.plot(
        layer.x,
        layer.y,
        linestyle="",
        marker="" if marker is Marker.NONE else MARKERS[marker],
        color=layer.colour,
        markersize=layer.size,
        markeredgewidth=0,
        label=label,
    )
    for x, y, words in zip(layer.x, layer.y, layer.words, strict=False):
        offset, across, up = PLACES[layer.place]
        axis.annotate(
            words,
            (x, y),
            offset,
            textcoords="offset points",
            ha=across,
            va=up,
            color=layer.colour,
            fontsize=8.5,
            annotation_clip=True,
        )


def _draw_ring(axis: Axes, layer: Ring, *, chosen: bool) -> None:
    axis.add_patch(
        Circle(
            (0.0, 0.0),
            layer.radius,
            fill=False,
            edgecolor=palette.INK if chosen else palette.GUIDE,
            linewidth=1.8 if chosen else 0.7,
        )
    )
    if chosen:
        axis.annotate(
            layer.label.replace(" ring", ""),
            (0.0, -layer.radius),
            (0, -10),
            textcoords="offset points",
            ha="center",
            fontsize=8.5,
            color=palette.INK,
        )
