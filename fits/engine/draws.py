"""Simulated repeats of T = (loss − R)/τ around a given truth, in one compiled loop."""

from dataclasses import dataclass

import numpy as np

from fits.engine.compiled import compiled
from fits.engine.data import FloatArray
from fits.engine.settings import Shrinkage
from fits.engine.shrinkage import minimise_risk, risk_of, tau_squared_of


@dataclass(frozen=True, eq=False)
class Noise:
    """What one assessment draws once and uses for every centre and curve.

    normal     shape (B, J): standard normal
    variances  shape (B,): the v that each repeat believes in; the true one times χ²_ν/ν where v is estimated
    variance   the true v
    freedom    ν, inf where v is known
    """

    normal: FloatArray
    variances: FloatArray
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
    return Noise(normal, variance * shares, variance, freedom)


def statistics(truth: FloatArray, noise: Noise, *, shrinkage: Shrinkage) -> FloatArray:
    """T' of each repeat Z' = truth + N(0, v I), shape (B,), in the order of the draws."""
    found = np.empty(noise.draws)
    _statistics(
        truth,
        noise.normal,
        np.sqrt(noise.variance),
        noise.variances,
        noise.freedom,
        shrinkage is Shrinkage.NESTED,
        found,
    )
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
    scale: float,
    variances: FloatArray,
    freedom: float,
    nested: bool,
    found: FloatArray,
) -> None:
    functions = truth.size
    z = np.empty(functions)
    factors = np.empty(functions)
    work = np.empty((3, functions))
    for draw in range(normal.shape[0]):
        v = variances[draw]
        for j in range(functions):
            z[j] = truth[j] + scale * normal[draw, j]
        minimise_risk(z, v, nested, factors, work)
        loss = 0.0
        for j in range(functions):
            difference = factors[j] * z[j] - truth[j]
            loss += difference * difference
        found[draw] = statistic_of(loss, risk_of(z, v, factors), tau_squared_of(z, v, freedom, factors))


def warm_up() -> None:
    """Compile, or load from disk, every kernel: once at a worker's start and not in someone's first job."""
    rng = np.random.default_rng(0)
    for freedom in (np.inf, 10.0):
        noise = draw_noise(rng, draws=2, functions=3, variance=0.1, freedom=freedom)
        for shrinkage in Shrinkage:
            statistics(np.zeros(3), noise, shrinkage=shrinkage)
