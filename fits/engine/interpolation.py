"""A curve between the points of its own grid, and what the data's points see of it."""

from dataclasses import dataclass

import numpy as np
from scipy.interpolate import CubicSpline, PchipInterpolator

from fits.engine.data import Axis, CurveTable, FloatArray
from fits.engine.observation import Observation
from fits.engine.refusal import InputRefused

# How far outside its own grid rounding may put a point, as a share of the range.
_ROUNDING = 1e-9


@dataclass(frozen=True, eq=False)
class InterpolatedCurve:
    """A curve by cubic, or by monotone cubic, interpolation; never beyond its own range."""

    table: CurveTable
    axis: Axis
    monotone: bool = False

    def at(self, x: FloatArray) -> FloatArray:
        """Values at x. On a log axis the spline is one in ln x, where curves are smooth."""
        knots = self.table.x
        x = np.clip(x, knots[0], knots[-1])
        if self.axis is Axis.LOG and knots[0] > 0.0:
            knots, x = np.log(knots), np.log(x)
            x = np.clip(x, knots[0], knots[-1])
        return np.asarray(self._spline(knots)(x), dtype=np.float64)

    def mean(self, low: FloatArray, high: FloatArray) -> FloatArray:
        """Means over [low, high], exact for the spline in x."""
        integral = self._spline(self.table.x).antiderivative()
        low, high = (np.clip(edge, self.table.x[0], self.table.x[-1]) for edge in (low, high))
        return np.asarray((integral(high) - integral(low)) / (high - low))

    def _spline(self, knots: FloatArray) -> "CubicSpline[np.float64] | PchipInterpolator":
        return (PchipInterpolator if self.monotone else CubicSpline)(knots, self.table.y)


@dataclass(frozen=True, eq=False)
class CurveAtData:
    """What the points see by cubic and by monotone cubic interpolation, shape (n,)."""

    cubic: FloatArray
    monotone: FloatArray


def curve_at_data(curve: CurveTable, observation: Observation, axis: Axis) -> CurveAtData:
    """What the data's points see of a curve. Raises InputRefused where it does not reach."""
    refuse_missing_stretch(curve, *observation.reach)
    cubic, monotone = (
        observation.of(InterpolatedCurve(curve, axis, monotone=monotone)) for monotone in (False, True)
    )
    return CurveAtData(cubic, monotone)


def curve_on_grid(curve: CurveTable, grid: FloatArray, axis: Axis) -> FloatArray:
    """The curve by cubic interpolation, for drawing; NaN where it does not reach."""
    inside = (grid >= curve.x[0]) & (grid <= curve.x[-1])
    values = np.full(grid.size, np.nan)
    if inside.any():
        values[inside] = InterpolatedCurve(curve, axis).at(grid[inside])
    return values


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
