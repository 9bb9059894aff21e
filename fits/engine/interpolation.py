"""Bringing a curve from its own grid to the data's x (or its means to the data's bins)."""

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from scipy.interpolate import CubicSpline, PchipInterpolator

from fits.engine.data import Axis, CurveTable, Data, FloatArray
from fits.engine.refusal import InputRefused

# How far outside its own grid rounding may put a point, as a share of the range.
_ROUNDING = 1e-9


class Spline(Protocol):
    """A piecewise polynomial that can be integrated."""

    def __call__(self, x: FloatArray) -> FloatArray: ...

    def antiderivative(self) -> "Spline": ...


@dataclass(frozen=True, eq=False)
class CurveAtData:
    """cubic, monotone: values by cubic and by monotone cubic interpolation, shape (n,)."""

    cubic: FloatArray
    monotone: FloatArray


def curve_at_data(curve: CurveTable, data: Data) -> CurveAtData:
    """The curve at the data's x, or averaged over their bins. Raises InputRefused where it does not reach."""
    low = data.x if data.low is None else data.low
    high = data.x if data.high is None else data.high
    refuse_missing_stretch(curve, float(low.min()), float(high.max()))
    if data.low is not None and data.high is not None:
        return CurveAtData(
            _means(CubicSpline(curve.x, curve.y), data.low, data.high),
            _means(PchipInterpolator(curve.x, curve.y), data.low, data.high),
        )
    cubic, monotone = (values_between(curve, data.x, data.axis, kind) for kind in ("cubic", "monotone"))
    return CurveAtData(cubic, monotone)


def curve_on_grid(curve: CurveTable, grid: FloatArray, axis: Axis) -> FloatArray:
    """The curve by cubic interpolation, for drawing; NaN where it does not reach."""
    inside = (grid >= curve.x[0]) & (grid <= curve.x[-1])
    values = np.full(grid.size, np.nan)
    if inside.any():
        values[inside] = values_between(curve, grid[inside], axis, "cubic")
    return values


def values_between(curve: CurveTable, x: FloatArray, axis: Axis, kind: str) -> FloatArray:
    """Interpolate in x, or in ln x on a log axis, where curves are smooth in it."""
    x = np.clip(x, curve.x[0], curve.x[-1])
    logarithmic = axis is Axis.LOG and curve.x[0] > 0.0
    knots, at = (np.log(curve.x), np.log(x)) if logarithmic else (curve.x, x)
    at = np.clip(at, knots[0], knots[-1])
    spline = CubicSpline(knots, curve.y) if kind == "cubic" else PchipInterpolator(knots, curve.y)
    return np.asarray(spline(at), dtype=np.float64)


def refuse_missing_stretch(curve: CurveTable, low: float, high: float) -> None:
    """Curves are never continued beyond their own range."""
    slack = _ROUNDING * (high - low)
    missing = []
    if curve.x[0] > low + slack:
        missing.append(f"{low:.6g} to {curve.x[0]:.6g}")
    if curve.x[-1] < high - slack:
        missing.append(f"{curve.x[-1]:.6g} to {high:.6g}")
    if missing:
        raise InputRefused(
            "curve-too-short",
            "x",
            f"the curve does not cover the data: x from {' and from '.join(missing)} is missing",
            f"Give it from {low:.6g} to {high:.6g}",
        )


def _means(spline: Spline, low: FloatArray, high: FloatArray) -> FloatArray:
    integral = spline.antiderivative()
    return np.asarray((integral(high) - integral(low)) / (high - low))
