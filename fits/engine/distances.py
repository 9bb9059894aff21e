"""Distances of very many curves from one fit, by one product of matrices.

β = W m with W = Qᵀ L⁻¹/sqrt(n), so that whitening and projection are done once, for W, and not for each curve.
"""

from dataclasses import dataclass

import numpy as np

from fits.engine.data import FloatArray
from fits.engine.result import Fit

# Coordinates of this many curves at a time: they stay in the processor's cache on their way to a distance.
CURVES_AT_A_TIME = 4096


@dataclass(frozen=True, eq=False)
class Projection:
    """matrix W, shape (J, n); estimate β̂, shape (J,)."""

    matrix: FloatArray
    estimate: FloatArray

    def distances(self, values: FloatArray) -> FloatArray:
        """‖β_m − β̂‖ of each column of curves at the data, shape (n, k) → (k,)."""
        found = np.empty(values.shape[1])
        for start in range(0, found.size, CURVES_AT_A_TIME):
            columns = slice(start, start + CURVES_AT_A_TIME)
            difference = self.matrix @ values[:, columns]
            difference -= self.estimate[:, None]
            found[columns] = np.sqrt(np.einsum("jk,jk->k", difference, difference))
        return found


def projection_of(fit: Fit) -> Projection:
    """W of a fit, to be used again and again; J n numbers."""
    orthonormal = np.column_stack([fit.coordinates.design.combine(one) for one in np.eye(fit.z.size)])
    return Projection(
        np.ascontiguousarray(fit.whitening.apply_transposed(orthonormal).T / np.sqrt(orthonormal.shape[0])),
        fit.estimate,
    )


def distances(fit: Fit, values: FloatArray) -> FloatArray:
    """The distances of curves from a fit, shape (k,).

    values  what the points see of each curve, on the scale on which the data are judged, shape (n, k)
    """
    return projection_of(fit).distances(values)
