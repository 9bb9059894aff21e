"""Simulated repeats of T = (loss − R)/τ around a given truth, in one compiled loop."""

from dataclasses import dataclass

import numpy as np

from fits.engine.compiled import compiled
from fits.engine.data import FloatArray
from fits.engine.settings import Shrinkage
from fits.engine.shrinkage import WORK_ROWS, loss_risk_and_tau_squared, minimise_risk


@dataclass(frozen=True, eq=False)
class Noise:
    """What one assessment draws once and uses for every centre and curve.

    normal    shape (B, J): standard normal
    shares    shape (B,): χ²_ν/ν, by which the v that a repeat believes in misses the true one; 1 where v is known
    variance  v
    freedom   ν, inf where v is known
    """

    normal: FloatArray
    shares: FloatArray
    variance: float
    freedom: float

    @property
    def draws(self) -> int:
        """B."""
        return int(self.normal.shape[0])


def draw_noise(
    rng: np.random.Generator, *, draws: int, functions: int, variance: float, freedom: float
) -> Noise:
    """Draw the noise of B repeats: normal numbers first, then one χ² each where v is estimated."""
    normal = rng.standard_normal((draws, functions))
    known = np.isinf(freedom)
    shares = np.ones(draws) if known else rng.chisquare(freedom, draws) / freedom
    return Noise(normal, shares, variance, freedom)


def statistics(truth: FloatArray, noise: Noise, *, shrinkage: Shrinkage) -> FloatArray:
    """T' of each repeat Z' = truth + N(0, v I), shape (B,), in the order of the draws."""
    scales = np.full(noise.draws, np.sqrt(noise.variance))
    return _run(truth, noise, scales, noise.variance * noise.shares, shrinkage)


def conditional_statistics(
    truth: FloatArray, noise: Noise, *, total: float, shrinkage: Shrinkage
) -> FloatArray:
    """T' of repeats that share with the data what a curve leaves unknown: the size of the errors.

    If the curve is true and σ² estimated from a leftover with ν degrees of freedom, the scaled squares
    S = ν σ̂² + n ‖Z − β_m‖² are all that the data say of σ, and given S the misfit (in all n − J + J directions) is
    uniform on a sphere. So each repeat is scaled to the S of the data: whatever σ is, the p-value is exact.

    total  S in units of σ̂²
    """
    normal = noise.normal[:, : truth.size]
    chi2 = noise.shares * noise.freedom
    factors = total / (np.einsum("ij,ij->i", normal, normal) + chi2)
    believed = noise.variance * factors * noise.shares
    return _run(truth, noise, np.sqrt(noise.variance * factors), believed, shrinkage)


def _run(
    truth: FloatArray, noise: Noise, scales: FloatArray, variances: FloatArray, shrinkage: Shrinkage
) -> FloatArray:
    found = np.empty(noise.draws)
    nested = shrinkage is Shrinkage.NESTED
    _statistics(truth, noise.normal, scales, variances, noise.freedom, nested, found)
    return found


@compiled
def statistic_of(loss: float, risk: float, tau_squared: float) -> float:
    """(loss − R)/τ; where τ vanishes, its limit."""
    if tau_squared > 0.0:
        return float((loss - risk) / np.sqrt(tau_squared))
    if loss > risk:
        return np.inf
    return -np.inf if loss < risk else 0.0


@compiled
def _statistics(
    truth: FloatArray,
    normal: FloatArray,
    scales: FloatArray,
    variances: FloatArray,
    freedom: float,
    nested: bool,
    found: FloatArray,
) -> None:
    functions = truth.size
    z = np.empty(functions)
    factors = np.empty(functions)
    work = np.empty((WORK_ROWS, functions))
    for draw in range(normal.shape[0]):
        v = variances[draw]
        for j in range(functions):
            z[j] = truth[j] + scales[draw] * normal[draw, j]
        minimise_risk(z, v, nested, factors, work)
        loss, risk, tau_squared = loss_risk_and_tau_squared(z, truth, v, freedom, factors)
        found[draw] = statistic_of(loss, risk, tau_squared)


def warm_up() -> None:
    """Compile, or load from disk, every kernel: once at a worker's start and not in someone's first job."""
    rng = np.random.default_rng(0)
    for freedom in (np.inf, 10.0):
        noise = draw_noise(rng, draws=2, functions=3, variance=0.1, freedom=freedom)
        for shrinkage in Shrinkage:
            statistics(np.zeros(3), noise, shrinkage=shrinkage)
