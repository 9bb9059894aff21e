"""Data with errors, and curves over them, as a figure for core/static/js/figure.js to draw."""

import html
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from core.measurements.models import Axis, Measurement
from fits.engine.data import Data, FloatArray

# More points than this cannot be told apart on a screen, and slow it down.
MAXIMUM_DRAWN = 2000
INK, DATA, ERROR, GRID = "#17212b", "#3b444d", "#9aa3ab", "#e4e7ea"
CURVES = ("#175c8f", "#a8450b", "#2f6b3c", "#7a3d7a")
BAR = {"color": ERROR, "thickness": 1, "width": 0}
FONT = {"family": "system-ui, -apple-system, 'Segoe UI', Roboto, sans-serif", "size": 13, "color": INK}


@dataclass(frozen=True, eq=False)
class Series:
    """A named line through points."""

    name: str
    x: FloatArray
    y: FloatArray


@dataclass(frozen=True, eq=False)
class PreviewFigure:
    """What is drawn: points with standard errors, or bars over bins [low, high], and a line for each curve."""

    x_label: str
    y_label: str
    log_x: bool
    data: Series | None = None
    error: FloatArray | None = None
    bins: tuple[FloatArray, FloatArray] | None = None
    curves: Sequence[Series] = field(default_factory=tuple)

    @property
    def bars(self) -> str:
        """What its bars are, in words."""
        words = "bars of one standard error."
        return words if self.bins is None else f"{words} Each point is the mean over its horizontal bar."

    @property
    def is_thinned(self) -> bool:
        """Whether some of the data are left out of the drawing."""
        return self.data is not None and self.data.x.size > MAXIMUM_DRAWN


def preview_figure(
    measurement: Measurement,
    data: Data | None,
    errors: FloatArray | None = None,
    *,
    data_name: str = "data",
    curves: Sequence[Series] = (),
) -> PreviewFigure:
    """The figure of a release, a draft or curves of this measurement."""
    return PreviewFigure(
        x_label=measurement.x_label,
        y_label=measurement.y_label,
        log_x=measurement.axis == Axis.LOG,
        data=None if data is None else Series(data_name, data.x, data.y),
        error=errors,
        bins=None if data is None or data.low is None or data.high is None else (data.low, data.high),
        curves=curves,
    )


def plotly_json(figure: PreviewFigure) -> dict[str, Any]:
    """The figure as plotly.js takes it."""
    traces = [_line(curve, CURVES[index % len(CURVES)]) for index, curve in enumerate(figure.curves)]
    if figure.data is not None:
        traces.insert(0, _points(figure.data, figure.error, figure.bins))
    return {
        "data": traces,
        "layout": {
            "font": FONT,
            "margin": {"l": 70, "r": 15, "t": 35, "b": 60},
            "showlegend": len(traces) > 1,
            "legend": {"orientation": "h", "x": 0, "y": 1.02, "yanchor": "bottom"},
            "hovermode": "closest",
            "xaxis": _axis(figure.x_label) | {"type": "log" if figure.log_x else "linear"},
            "yaxis": _axis(figure.y_label),
            "plot_bgcolor": "#fff",
            "paper_bgcolor": "#fff",
        },
    }


def _axis(label: str) -> dict[str, Any]:
    return {
        "title": {"text": _text(label), "standoff": 12},
        "gridcolor": GRID,
        "linecolor": INK,
        "ticks": "outside",
        "tickcolor": INK,
        "zeroline": False,
        "automargin": True,
    }


def _points(
    data: Series, error: FloatArray | None, bins: tuple[FloatArray, FloatArray] | None
) -> dict[str, Any]:
    kept = drawn(data.x.size)
    trace: dict[str, Any] = {
        "type": "scatter",
        "mode": "markers",
        "name": _text(data.name),
        "x": data.x[kept].tolist(),
        "y": data.y[kept].tolist(),
        "marker": {"size": 5, "color": DATA},
    }
    if error is not None:
        bars = {"type": "data", "array": error[kept].tolist()}
        trace["error_y"] = bars | BAR
    if bins is not None:
        low, high = (edge[kept] for edge in bins)
        reach = {"array": (high - data.x[kept]).tolist(), "arrayminus": (data.x[kept] - low).tolist()}
        trace["error_x"] = {"type": "data", "symmetric": False} | reach | BAR | {"color": DATA}
    return trace


def _line(curve: Series, colour: str) -> dict[str, Any]:
    kept = drawn(curve.x.size)
    return {
        "type": "scatter",
        "mode": "lines",
        "name": _text(curve.name),
        "x": curve.x[kept].tolist(),
        "y": curve.y[kept].tolist(),
        "line": {"color": colour, "width": 2},
    }


def drawn(size: int) -> Any:
    """Indices of the points to draw, evenly thinned where there are too many."""
    if size <= MAXIMUM_DRAWN:
        return np.arange(size)
    return np.unique(np.linspace(0, size - 1, MAXIMUM_DRAWN).round().astype(np.int64))


def _text(words: str) -> str:
    """plotly.js reads tags and entities in names; those of a user are plain words."""
    return html.escape(words, quote=False)
