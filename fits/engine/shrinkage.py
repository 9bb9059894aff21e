"""Shrinkage factors that minimise the estimated risk.

R(λ) = Σ_j [λ_j² v + (1 − λ_j)² (Z_j² − v)]   (C. Stein, Ann. Statist. 9, 1981)
τ²   = 2 v² Σ (2λ_j − 1)² + 4 v max(0, Σ (1 − λ_j)² (Z_j² − v)), plus 2 v²/ν (Σ (2λ_j − 1))² where v itself is
estimated with ν degrees of freedom: the estimated variance of (loss − R)
(R. Beran, L. Dümbgen, Ann. Statist. 26, 1998).
"""

import math
from dataclasses import dataclass

import numpy as np

from fits.engine.data import FloatArray
from fits.engine.kernels import WORK_ROWS, loss_risk_and_tau_squared, minimise_risk
from fits.engine.settings import Shrinkage


@dataclass(frozen=True, eq=False)
class Shrunk:
    """factors λ, shape (J,); risk R and tau τ in squared distance."""

    factors: FloatArray
    risk: float
    tau: float

    @property
    def effective_parameters(self) -> float:
        """Σ λ_j."""
        return float(self.factors.sum())


def shrink(z: FloatArray, *, variance: float, freedom: float, shrinkage: Shrinkage) -> Shrunk:
    """The factors of the chosen family with the smallest estimated risk.

    z         coordinates Z, shape (J,)
    variance  v
    freedom   ν, inf where v is known
    """
    factors = np.empty_like(z)
    minimise_risk(z, variance, shrinkage is Shrinkage.NESTED, factors, np.empty((WORK_ROWS, z.size)))
    _, risk, tau_squared = loss_risk_and_tau_squared(z, z, variance, freedom, factors)
    return Shrunk(factors, risk, math.sqrt(tau_squared))


def nested_risks(z: FloatArray, variance: float) -> FloatArray:
    """R of keeping the first k coordinates whole and no other, k = 0 … J."""
    dropped = np.concatenate(([0.0], np.cumsum((z**2 - variance)[::-1])))[::-1]
    return np.asarray(np.arange(z.size + 1) * variance + dropped)


def risk_of(z: FloatArray, v: float, factors: FloatArray) -> float:
    """R(λ)."""
    return float(loss_risk_and_tau_squared(z, z, v, math.inf, factors)[1])
