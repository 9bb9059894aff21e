"""A fit's points and weights such that Σ w (g − f̂)² never exceeds the squared distance between two curves.

With independent errors w = 1/(n σ²). With correlated ones Σ⁻¹ is at least 1/(σ_i² κ) in every direction, κ the largest
eigenvalue of the correlation matrix. Neighbours are pooled where there are more points than the dynamic programme can
take, and where points share an x: by convexity a pool's mean difference costs no more than its points did, and means of
consecutive points have no more peaks than the points.
"""

from dataclasses import dataclass

import numpy as np
import scipy.linalg

from fits.engine.data import Data, FloatArray
from fits.engine.features.space import CurveSpace
from fits.engine.result import Result
from fits.engine.whitening import CorrelatedErrors, IndependentErrors, SharedErrors, Whitening

MOST_POINTS = 1500


@dataclass(frozen=True, eq=False)
class ComparedPoints:
    """x: shape (m,), increasing; values: f̂ there; weights; thinning: bound on what pooling loses, in distance."""

    x: FloatArray
    values: FloatArray
    weights: FloatArray
    thinning: float

    def place_of(self, change: int) -> float:
        """The x at which a segment that ends before point `change` gives way to the next."""
        if change == 0:
            return float(self.x[0])
        if change == self.x.size:
            return float(self.x[-1])
        return float((self.x[change - 1] + self.x[change]) / 2.0)


def compared_points(result: Result, space: CurveSpace) -> ComparedPoints:
    """The points on which curves are compared with the fit, for any error model and way of observing."""
    data = result.data
    if data.windows is not None or not _bins_are_in_order(data):
        # What such points see may have more peaks than the curve; its values on the grid do not.
        return ComparedPoints(space.grid, space.fit, _weights_on_grid(space), 0.0)
    whitening = result.fit.whitening
    weights = 1.0 / (data.points * whitening.standard_errors**2 * correlation_bound(whitening))
    order = np.argsort(data.x, kind="stable")
    return _pooled(data.x[order], result.seen[order], weights[order])


def _weights_on_grid(space: CurveSpace) -> FloatArray:
    """w_g = c/‖u(x_g)‖² with the largest c for which Σ w_g u(x_g) u(x_g)ᵀ stays below the identity."""
    lengths = np.linalg.norm(space.values, axis=1)
    return np.asarray(1.0 / (lengths * _largest_singular_value(space.values / lengths[:, None])) ** 2)


def correlation_bound(whitening: Whitening) -> float:
    """At least the largest eigenvalue of the correlation matrix; 1 for independent errors."""
    if isinstance(whitening, IndependentErrors):
        return 1.0
    sigma = whitening.standard_errors
    if isinstance(whitening, CorrelatedErrors):
        return _largest_square(whitening.lower / sigma[:, None])
    assert isinstance(whitening, SharedErrors)
    own = whitening.own.standard_errors / sigma
    return correlation_bound(whitening.own) * float(own.max()) ** 2 + _largest_square(
        whitening.columns / sigma[:, None]
    )


def _largest_singular_value(matrix: FloatArray) -> float:
    return float(np.sqrt(_largest_square(matrix)))


def _largest_square(matrix: FloatArray) -> float:
    """The largest eigenvalue of A Aᵀ, rounded up."""
    tall = matrix.shape[1] < matrix.shape[0]
    gram = matrix.T @ matrix if tall else matrix @ matrix.T
    last = gram.shape[0] - 1
    return float(scipy.linalg.eigvalsh(gram, subset_by_index=[last, last])[0]) * (1.0 + 1e-9)


def _bins_are_in_order(data: Data) -> bool:
    """Averages over intervals whose ends rise together have no more peaks than the curve."""
    if data.low is None or data.high is None:
        return True
    order = np.argsort(data.x, kind="stable")
    return bool((np.diff(data.low[order]) >= 0.0).all() and (np.diff(data.high[order]) >= 0.0).all())


def _pooled(x: FloatArray, values: FloatArray, weights: FloatArray) -> ComparedPoints:
    """Pool equal x, then neighbours until no more than MOST_POINTS are left."""
    starts = np.flatnonzero(np.concatenate(([True], np.diff(x) > 0.0)))
    if starts.size > MOST_POINTS:
        starts = starts[np.unique(np.linspace(0, starts.size, MOST_POINTS, endpoint=False).astype(np.int64))]
    total = np.add.reduceat(weights, starts)
    means = np.add.reduceat(weights * values, starts) / total
    sizes = np.diff(np.append(starts, x.size))
    within = 0.0 if starts.size == x.size else weights @ (values - np.repeat(means, sizes)) ** 2
    centres = np.add.reduceat(weights * x, starts) / total
    return ComparedPoints(centres, means, total, float(np.sqrt(within)))
