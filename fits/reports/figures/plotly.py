"""A figure as the JSON that plotly.js draws. Plain mappings; the Python package is used in tests only.

Each trace carries in `meta` what core/static/js/charts.js needs to switch levels and curves.
"""

import math
from typing import Any

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

DASHES = {Dash.SOLID: "solid", Dash.DASHED: "dash", Dash.DASH_DOTTED: "dashdot", Dash.DOTTED: "dot"}
SYMBOLS = {Marker.NONE: "circle", Marker.DOT: "circle", Marker.CIRCLE: "circle", Marker.CROSS: "x"}
PLACES = {
    Place.ABOVE: "top center",
    Place.BELOW: "bottom center",
    Place.LEFT: "middle left",
    Place.RIGHT: "middle right",
    Place.ABOVE_LEFT: "top left",
}
FONT = {"family": "system-ui, 'Segoe UI', 'Liberation Sans', sans-serif", "size": 13, "color": palette.INK}
CHOSEN_WIDTH, OTHER_WIDTH = 2.6, 1.1
GAP = 0.06
RING_POINTS = 180

Trace = dict[str, Any]


def plotly_json(figure: Figure) -> dict[str, Any]:
    """`data` and `layout`, under the level and curve that the figure has chosen."""
    return {
        "data": [trace for layer in figure.layers for trace in _traces(layer, figure)],
        "layout": _layout(figure),
    }


def _traces(layer: Layer, figure: Figure) -> list[Trace]:
    common = _common(layer, figure)
    match layer:
        case Points():
            return [common | _points(layer, figure)]
        case Line():
            return [common | _line(layer, figure)]
        case Band():
            return _band(layer, common)
        case Ring():
            return [common | _ring(layer, figure)]
    raise TypeError(f"no way to draw {type(layer).__name__}")


def _common(layer: Layer, figure: Figure) -> Trace:
    suffix = "" if layer.panel == 0 else str(layer.panel + 1)
    meta: dict[str, Any] = {"kind": type(layer).__name__.lower()}
    if layer.level:
        meta["level"] = layer.level
    if layer.curve:
        meta |= {"curve": layer.curve, "choice": layer.choice.value}
    if layer.inside:
        meta["inside"] = dict(layer.inside)
    # Curves come with a name that their sender chose: plotly reads a little HTML in names, so none is let in.
    return {
        "type": "scatter",
        "name": _plain(layer.label),
        "xaxis": "x",
        "yaxis": f"y{suffix}",
        "visible": figure.shows(layer),
        "showlegend": False,
        "meta": meta,
        "hoverinfo": "x+y+name" if layer.label else "skip",
    }


def _points(layer: Points, figure: Figure) -> Trace:
    marker = Marker.CROSS if _is_outside(layer, figure) else layer.marker
    trace: Trace = {
        "mode": "markers+text" if layer.words else "markers",
        "x": _rounded(layer.x),
        "y": _rounded(layer.y),
        "marker": {"color": layer.colour, "size": 1.4 * layer.size, "symbol": SYMBOLS[marker]},
    }
    if layer.marker is Marker.NONE:
        trace["marker"]["opacity"] = 0.0
    if layer.error:
        trace["error_y"] = {
            "type": "data",
            "array": _rounded(layer.error),
            "color": palette.ERROR,
            "thickness": 1,
            "width": 0,
        }
    if layer.words:
        trace |= {
            "text": [_plain(word) for word in layer.words],
            "textposition": PLACES[layer.place],
            "textfont": {"color": layer.colour, "size": 12},
        }
    return trace


def _line(layer: Line, figure: Figure) -> Trace:
    dash = Dash.DASHED if _is_outside(layer, figure) else layer.dash
    width = layer.thickness
    if isinstance(layer, LevelLine):
        width = CHOSEN_WIDTH if layer.level == figure.level else OTHER_WIDTH
    trace: Trace = {
        "mode": "lines" if layer.marker is Marker.NONE else "lines+markers",
        "x": _rounded(layer.x),
        "y": _rounded(layer.y),
        "line": {"color": layer.colour, "width": width, "dash": DASHES[dash]},
    }
    if layer.marker is not Marker.NONE:
        trace["marker"] = {"color": layer.colour, "size": 5, "symbol": SYMBOLS[layer.marker]}
    return trace


def _band(layer: Band, common: Trace) -> list[Trace]:
    """One closed outline: a fill between two traces would lose its partner when one of them is hidden."""
    return [
        common
        | {
            "mode": "lines",
            "x": _rounded((*layer.x, *reversed(layer.x))),
            "y": _rounded((*layer.upper, *reversed(layer.lower))),
            "fill": "toself",
            "fillcolor": _with_opacity(layer.colour, layer.opacity),
            "line": {"width": 0, "color": layer.colour},
            "hoverinfo": "skip",
        }
    ]


def _ring(layer: Ring, figure: Figure) -> Trace:
    turns = [2.0 * math.pi * i / RING_POINTS for i in range(RING_POINTS + 1)]
    chosen = layer.level == figure.level
    return {
        "mode": "lines",
        "x": _rounded(tuple(layer.radius * math.cos(turn) for turn in turns)),
        "y": _rounded(tuple(layer.radius * math.sin(turn) for turn in turns)),
        "line": {
            "color": palette.INK if chosen else palette.GUIDE,
            "width": 2.2 if chosen else 0.8,
            "dash": "solid",
        },
        "hoverinfo": "name",
    }


def _is_outside(layer: Layer, figure: Figure) -> bool:
    return layer.inside.get(figure.level) is False


def _layout(figure: Figure) -> dict[str, Any]:
    layout: dict[str, Any] = {
        "autosize": True,
        "height": round(figure.height * 92),
        "margin": {"l": 64, "r": 16, "t": 12, "b": 52},
        "font": FONT,
        "paper_bgcolor": "rgba(0,0,0,0)",
        "plot_bgcolor": "rgba(0,0,0,0)",
        "hovermode": "closest",
        "hoverlabel": {"bgcolor": "#ffffff", "font": FONT, "namelength": 40},
        "dragmode": "zoom",
        # Keeps what the reader zoomed to when a level or curve is switched.
        "uirevision": figure.name,
        "xaxis": _axis(figure.x) | {"anchor": "y" if len(figure.panels) == 1 else f"y{len(figure.panels)}"},
    }
    whole = sum(panel.share for panel in figure.panels)
    top = 1.0
    for index, panel in enumerate(figure.panels):
        bottom = top - panel.share / whole
        key = "yaxis" if index == 0 else f"yaxis{index + 1}"
        last = index == len(figure.panels) - 1
        domain = [
            0.0 if last else round(bottom + GAP / 2.0, 4),
            round(top if index == 0 else top - GAP / 2.0, 4),
        ]
        layout[key] = _axis(panel.y) | {"domain": domain, "anchor": "x"}
        top = bottom
    if figure.equal_aspect:
        layout["yaxis"] |= {
            "scaleanchor": "x",
            "scaleratio": 1,
            "showticklabels": False,
            "constrain": "domain",
        }
        layout["xaxis"]["constrain"] = "domain"
    return layout


def _axis(axis: Axis) -> dict[str, Any]:
    drawn: dict[str, Any] = {
        "title": {"text": _plain(axis.label), "standoff": 8, "font": {"size": 13}},
        "gridcolor": palette.GRID,
        "zeroline": False,
        "linecolor": palette.GUIDE,
        "showline": True,
        "ticks": "outside",
        "ticklen": 4,
        "tickcolor": palette.GUIDE,
        "automargin": True,
    }
    if axis.log:
        drawn |= {
            "type": "log",
            "tickvals": list(axis.ticks),
            "ticktext": [tick_label(tick) for tick in axis.ticks],
        }
    else:
        drawn["type"] = "linear"
        if axis.ticks:
            drawn["tickvals"] = list(axis.ticks)
    if axis.range:
        drawn["range"] = list(axis.range)
    return drawn


def _rounded(values: Values) -> list[float]:
    """Six digits: finer than a screen, and half the bytes."""
    return [float(f"{value:.6g}") for value in values]


def _plain(text: str) -> str:
    return text.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;")


def _with_opacity(colour: str, opacity: float) -> str:
    red, green, blue = (int(colour[i : i + 2], 16) for i in (1, 3, 5))
    return f"rgba({red},{green},{blue},{opacity})"
