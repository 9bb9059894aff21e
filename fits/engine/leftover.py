"""The check of what the judged functions leave over."""

from dataclasses import dataclass

import numpy as np
import scipy.special

from fits.engine.coordinates import Coordinates
from fits.engine.data import FloatArray


@dataclass(frozen=True)
class Leftover:
    """C = n (‖y*‖²/n − ‖Z‖²), χ² with n − J degrees of freedom when nothing finer is there and Σ is right."""

    chi2: float
    dof: int
    p_value: float

    def root_mean_square(self, points: int) -> float:
        """Its size as a curve, in error bars."""
        return float(np.sqrt(self.chi2 / points))


def leftover_of(coordinates: Coordinates, whitened: FloatArray, z: FloatArray) -> Leftover | None:
    """The leftover of whitened values, shape (n,), with coordinates z; None where J = n leaves nothing."""
    dof = coordinates.points - coordinates.functions
    if dof == 0:
        return None
    # Subtracting the projection before squaring keeps the digits that a difference of squares would lose.
    rest = coordinates.residuals(whitened, z)
    chi2 = float(rest @ rest)
    return Leftover(chi2, dof, float(scipy.special.chdtrc(dof, chi2)))


def leftover_residuals(coordinates: Coordinates, whitened: FloatArray, z: FloatArray) -> FloatArray:
    """The whitened residuals of the unshrunk fit, sorted and scaled to unit variance each, for a quantile plot."""
    rest = coordinates.residuals(whitened, z)
    # Each residual's variance is 1 − h_i, h_i the share that the J functions take up at that point.
    free = 1.0 - coordinates.design.leverage()
    enough = free > 1e-6
    return np.sort(rest[enough] / np.sqrt(free[enough]))
