"""The polynomial–cosine basis: the linear term removes the cosine basis's bias at the ends.

ψ_0 = 1, ψ_1 = t − 1/2, ψ_j = cos((j − 1) π t) for j ≥ 2, with t = (x − a)/(b − a), or the same of ln x.
Source: R. Eubank, P. Speckman, Biometrika 77 (1990).
"""

from dataclasses import dataclass

import numpy as np

from fits.engine.compiled import compiled
from fits.engine.data import Axis, FloatArray

# The recurrence loses about k² units in the last place at cos(k θ): 1e-12 at this many functions.
_MOST_BY_RECURRENCE = 100


@dataclass(frozen=True)
class Interval:
    """The stretch [a, b] of the axis that t = 0 … 1 runs over."""

    low: float
    high: float
    axis: Axis

    @property
    def span(self) -> float:
        """b − a, in x or in ln x."""
        return float(self._on_axis(np.array(self.high)) - self._on_axis(np.array(self.low)))

    def fraction(self, x: FloatArray) -> FloatArray:
        """t of x."""
        return np.asarray((self._on_axis(x) - self._on_axis(np.array(self.low))) / self.span)

    def grid(self, size: int) -> FloatArray:
        """Points evenly spaced in t, both ends included exactly."""
        t = np.linspace(0.0, 1.0, size)
        if self.axis is Axis.LOG:
            points = self.low * (self.high / self.low) ** t
        else:
            points = self.low + (self.high - self.low) * t
        points[0], points[-1] = self.low, self.high
        return points

    def _on_axis(self, x: FloatArray) -> FloatArray:
        return np.log(x) if self.axis is Axis.LOG else x


def raw_functions(t: FloatArray, functions: int) -> FloatArray:
    """ψ_0 … ψ_{J−1} at t, shape (len(t), J), each function contiguous in memory."""
    values = np.empty((functions, t.size))
    if functions <= _MOST_BY_RECURRENCE:
        _by_recurrence(t, np.cos(np.pi * t), values)
    else:
        values[0], values[1] = 1.0, t - 0.5
        np.cos(np.pi * np.outer(np.arange(1, functions - 1), t), out=values[2:])
    return values.T


def raw_slopes(t: FloatArray, functions: int) -> FloatArray:
    """dψ/dt at t, shape (len(t), J)."""
    values = np.zeros((t.size, functions))
    if functions > 1:
        values[:, 1] = 1.0
    angular = np.pi * np.arange(1, functions - 1)
    values[:, 2:] = -angular * np.sin(np.outer(t, angular))
    return values


@compiled
def _by_recurrence(t: FloatArray, cosine: FloatArray, values: FloatArray) -> None:
    """cos((k + 1) θ) = 2 cos θ cos(k θ) − cos((k − 1) θ): one cosine for each point instead of J."""
    for j in range(values.shape[0]):
        for i in range(t.size):
            if j == 0:
                values[j, i] = 1.0
            elif j == 1:
                values[j, i] = t[i] - 0.5
            elif j == 2:
                values[j, i] = cosine[i]
            elif j == 3:
                values[j, i] = 2.0 * cosine[i] * cosine[i] - 1.0
            else:
                values[j, i] = 2.0 * cosine[i] * values[j - 1, i] - values[j - 2, i]


def averaged_functions(interval: Interval, low: FloatArray, high: FloatArray, functions: int) -> FloatArray:
    """The mean of each ψ over the bins [low, high] in x, in closed form, shape (len(low), J)."""
    if interval.axis is Axis.LOG:
        return _averaged_on_log_axis(interval, low, high, functions)
    start, end = interval.fraction(low), interval.fraction(high)
    values = np.empty((low.size, functions))
    values[:, 0] = 1.0
    if functions > 1:
        values[:, 1] = (start + end) / 2.0 - 0.5
    for j in range(2, functions):
        # Mean of cos over [s, e] as cos at the middle times sinc of half the width: no cancellation.
        values[:, j] = np.cos((j - 1) * np.pi * (start + end) / 2.0) * np.sinc((j - 1) * (end - start) / 2.0)
    return values


def _averaged_on_log_axis(
    interval: Interval, low: FloatArray, high: FloatArray, functions: int
) -> FloatArray:
    """∫ cos(ω ln(x/a)) dx = Re x (x/a)^{iω} / (1 + iω), ∫ ln(x/a) dx = x ln(x/a) − x."""
    start, end = np.log(low / interval.low), np.log(high / interval.low)
    width = high - low
    values = np.empty((low.size, functions))
    values[:, 0] = 1.0
    if functions > 1:
        mean = (high * end - low * start) / width - 1.0
        values[:, 1] = mean / interval.span - 0.5
    for j in range(2, functions):
        omega = (j - 1) * np.pi / interval.span
        integral = (high * np.exp(1j * omega * end) - low * np.exp(1j * omega * start)) / (1.0 + 1j * omega)
        values[:, j] = integral.real / width
    return values
