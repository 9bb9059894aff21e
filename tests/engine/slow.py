"""The method once more, slowly and independently: plain loops, Gram–Schmidt, scipy's isotonic regression."""

import math

import numpy as np
import scipy.optimize

from fits.engine.data import FloatArray


def factors(z: FloatArray, v: float, *, nested: bool) -> FloatArray:
    """λ by exhaustive search over nested ones, or by scipy's regression."""
    if nested:
        candidates = [np.array([1.0] * k + [0.0] * (z.size - k)) for k in range(z.size + 1)]
        return min(candidates, key=lambda candidate: risk(z, v, candidate))
    regression = scipy.optimize.isotonic_regression(1.0 - v / z**2, weights=z**2, increasing=False)
    return np.clip(regression.x, 0.0, 1.0)


def risk(z: FloatArray, v: float, lam: FloatArray) -> float:
    """R(λ)."""
    return math.fsum(f * f * v + (1 - f) ** 2 * (zj * zj - v) for f, zj in zip(lam, z, strict=True))


def tau(z: FloatArray, v: float, lam: FloatArray, freedom: float = math.inf) -> float:
    """τ."""
    bias = math.fsum((1 - f) ** 2 * (zj * zj - v) for f, zj in zip(lam, z, strict=True))
    squares = math.fsum((2 * f - 1) ** 2 for f in lam)
    signs = math.fsum(2 * f - 1 for f in lam)
    return math.sqrt(2 * v * v * squares + 2 * v * v / freedom * signs**2 + 4 * v * max(0.0, bias))


def statistics(
    truth: FloatArray,
    normal: FloatArray,
    variances: FloatArray,
    v: float,
    *,
    nested: bool,
    freedom: float = math.inf,
) -> FloatArray:
    """T' of each repeat."""
    found = []
    for noise, believed in zip(normal, variances, strict=True):
        z = truth + math.sqrt(v) * noise
        lam = factors(z, float(believed), nested=nested)
        loss = math.fsum((f * zj - b) ** 2 for f, zj, b in zip(lam, z, truth, strict=True))
        found.append((loss - risk(z, float(believed), lam)) / tau(z, float(believed), lam, freedom))
    return np.array(found)


def orthonormal_functions(x: FloatArray, errors: FloatArray, functions: int) -> list[FloatArray]:
    """u_j at the data by classical Gram–Schmidt under ⟨f, g⟩ = Σ f g/σ²/n."""
    t = (x - x.min()) / (x.max() - x.min())
    raw = [np.ones_like(t), t - 0.5] + [np.cos((j - 1) * np.pi * t) for j in range(2, functions)]
    found: list[FloatArray] = []
    for column in raw[:functions]:
        rest = column.copy()
        for _ in range(3):
            for known in found:
                rest = rest - np.mean(rest * known / errors**2) * known
        found.append(rest / math.sqrt(np.mean(rest**2 / errors**2)))
    return found
