"""How a point sees the curve: at one x, averaged over a bin, or through a row of a window matrix."""

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from fits.engine.basis import Interval, averaged_functions, raw_functions
from fits.engine.data import Axis, Data, FloatArray


class Piecewise(Protocol):
    """A curve that can be evaluated and averaged."""

    def at(self, x: FloatArray) -> FloatArray:
        """Values at x."""

    def mean(self, low: FloatArray, high: FloatArray) -> FloatArray:
        """Means over [low, high] in x."""


class Observation(Protocol):
    """Linear in the curve, one number for each point."""

    @property
    def reach(self) -> tuple[float, float]:
        """Smallest and largest x that is looked at."""

    def functions(self, interval: Interval, count: int, rows: slice) -> FloatArray:
        """What those points see of the raw functions ψ_0 … ψ_{J−1}, shape (rows, J)."""

    def of(self, curve: Piecewise) -> FloatArray:
        """What the points see of a curve, shape (n,)."""


@dataclass(frozen=True, eq=False)
class AtPoints:
    """y_i = f(x_i) + e_i."""

    x: FloatArray

    @property
    def reach(self) -> tuple[float, float]:
        return float(self.x.min()), float(self.x.max())

    def functions(self, interval: Interval, count: int, rows: slice) -> FloatArray:
        return raw_functions(interval.fraction(self.x[rows]), count)

    def of(self, curve: Piecewise) -> FloatArray:
        return curve.at(self.x)


@dataclass(frozen=True, eq=False)
class OverBins:
    """y_i is the mean of f over [low_i, high_i]."""

    low: FloatArray
    high: FloatArray

    @property
    def reach(self) -> tuple[float, float]:
        return float(self.low.min()), float(self.high.max())

    def functions(self, interval: Interval, count: int, rows: slice) -> FloatArray:
        return averaged_functions(interval, self.low[rows], self.high[rows], count)

    def of(self, curve: Piecewise) -> FloatArray:
        return curve.mean(self.low, self.high)


@dataclass(frozen=True, eq=False)
class ThroughWindows:
    """y_i = Σ_k M_ik f(grid_k)."""

    grid: FloatArray
    weights: FloatArray

    @property
    def reach(self) -> tuple[float, float]:
        used = np.flatnonzero(self.weights.any(axis=0))
        return float(self.grid[used].min()), float(self.grid[used].max())

    def functions(self, interval: Interval, count: int, rows: slice) -> FloatArray:
        low, high = self.reach
        on_grid = raw_functions(interval.fraction(np.clip(self.grid, low, high)), count)
        return np.asarray(self.weights[rows] @ on_grid)

    def of(self, curve: Piecewise) -> FloatArray:
        low, high = self.reach
        return np.asarray(self.weights @ curve.at(np.clip(self.grid, low, high)))


def observation_of(data: Data) -> Observation:
    """How the points of these data see a curve."""
    if data.windows is not None:
        return ThroughWindows(data.windows.grid, data.windows.weights)
    if data.low is not None and data.high is not None:
        return OverBins(data.low, data.high)
    return AtPoints(data.x)


def interval_of(data: Data) -> Interval:
    """The stretch of x that the data look at."""
    low, high = observation_of(data).reach
    return Interval(low, high, Axis(data.axis))
