"""Shrinkage factors that minimise the estimated risk.

R(λ) = Σ_j [λ_j² v + (1 − λ_j)² (Z_j² − v)]   (C. Stein, Ann. Statist. 9, 1981)
τ²   = 2 v² Σ (2λ_j − 1)² + 4 v max(0, Σ (1 − λ_j)² (Z_j² − v)), plus 2 v²/ν (Σ (2λ_j − 1))² where v itself is
estimated with ν degrees of freedom: the estimated variance of (loss − R)
(R. Beran, L. Dümbgen, Ann. Statist. 26, 1998).
"""

import math
from dataclasses import dataclass

import numpy as np

from fits.engine.compiled import compiled
from fits.engine.data import FloatArray
from fits.engine.settings import Shrinkage

# Arrays of J numbers that the regression works in.
WORK_ROWS = 4


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


@compiled
def minimise_risk(z: FloatArray, v: float, nested: bool, factors: FloatArray, work: FloatArray) -> None:
    """Write the minimising factors into `factors`; `work` has shape (4, J)."""
    if nested:
        _nested_factors(z, v, factors)
    else:
        _monotone_factors(z, v, factors, work)


@compiled
def _nested_factors(z: FloatArray, v: float, factors: FloatArray) -> None:
    # Keeping coordinate j changes R by 2v − Z_j²; of equal minima the smallest k is taken.
    change = 0.0
    least = 0.0
    keep = 0
    for j in range(z.size):
        change += 2.0 * v - z[j] * z[j]
        if change < least:
            least = change
            keep = j + 1
    for j in range(z.size):
        factors[j] = 1.0 if j < keep else 0.0


@compiled
def _monotone_factors(z: FloatArray, v: float, factors: FloatArray, work: FloatArray) -> None:
    """Non-increasing regression of 1 − v/Z_j² with weights Z_j², clipped to [0, 1], by pooling neighbours.

    A pool's value is (Σ Z² − v · count)/Σ Z². A coordinate of 0 has weight 0 and the limit −∞ for a value: it
    pools with whatever comes after it and lowers that, as a vanishing Z_j would.
    """
    numerators, weights, values, ends = work[0], work[1], work[2], work[3]
    pools = 0
    for j in range(z.size):
        weight = z[j] * z[j]
        numerator = weight - v
        value = numerator / weight if weight > 0.0 else -np.inf
        while pools > 0 and value > values[pools - 1]:
            pools -= 1
            numerator += numerators[pools]
            weight += weights[pools]
            value = numerator / weight
        numerators[pools], weights[pools], values[pools], ends[pools] = numerator, weight, value, j + 1
        pools += 1
    start = 0
    for pool in range(pools):
        value = min(1.0, max(0.0, values[pool]))
        end = int(ends[pool])
        for j in range(start, end):
            factors[j] = value
        start = end


@compiled
def loss_risk_and_tau_squared(
    z: FloatArray, truth: FloatArray, v: float, freedom: float, factors: FloatArray
) -> tuple[float, float, float]:
    """‖λ Z − truth‖², R and τ², in one run over the coordinates: sums that wait for one another take turns."""
    loss = risk = signs = squares = bias = 0.0
    for j in range(z.size):
        kept = factors[j]
        lost = 1.0 - kept
        miss = kept * z[j] - truth[j]
        loss += miss * miss
        beyond = lost * lost * (z[j] * z[j] - v)
        risk += kept * kept * v + beyond
        bias += beyond
        sign = 2.0 * kept - 1.0
        signs += sign
        squares += sign * sign
    tau_squared = 2.0 * v * v * squares + 2.0 * v * v / freedom * signs * signs + 4.0 * v * max(0.0, bias)
    return loss, risk, tau_squared


@compiled
def risk_of(z: FloatArray, v: float, factors: FloatArray) -> float:
    """R(λ)."""
    return loss_risk_and_tau_squared(z, z, v, np.inf, factors)[1]
