"""The compiled inner loops: shrinkage factors of smallest estimated risk, and T of many repeats.

Functions that call one another stand in one file, because the cache on disk tells whether a compiled function is still
that of its source by the text of its own file: a loop in another file would go on with what it called before.
"""

import numpy as np

from fits.engine.compiled import compiled
from fits.engine.data import FloatArray

# Arrays of J numbers that the regression works in.
WORK_ROWS = 3


@compiled
def minimise_risk(z: FloatArray, v: float, nested: bool, factors: FloatArray, work: FloatArray) -> None:
    """Write the minimising factors into `factors`; `work` has shape (3, J)."""
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

    A pool's value is (Σ Z² − v · count)/Σ Z². Values of two pools are compared by cross products, since a division
    takes as long as ten of them; a coordinate of 0 has weight 0 and the value −∞, and pools with what comes after it,
    as a vanishing Z_j would. Pools of positive value end where Σ_{i<j} (Z_i² − v) is largest; what follows is 0.
    """
    numerators, weights, ends = work[0], work[1], work[2]
    kept = _end_of_positive_pools(z, v)
    pools = 0
    weight = z[0] * z[0]
    numerator = weight - v
    for j in range(1, kept):
        next_weight = z[j] * z[j]
        next_numerator = next_weight - v
        if next_numerator * weight > numerator * next_weight:
            numerator += next_numerator
            weight += next_weight
            while pools > 0 and numerator * weights[pools - 1] > numerators[pools - 1] * weight:
                pools -= 1
                numerator += numerators[pools]
                weight += weights[pools]
        else:
            numerators[pools], weights[pools], ends[pools] = numerator, weight, j
            pools += 1
            numerator, weight = next_numerator, next_weight
    if kept > 0:
        numerators[pools], weights[pools], ends[pools] = numerator, weight, kept
        pools += 1
    start = 0
    for pool in range(pools):
        value = min(1.0, max(0.0, numerators[pool] / weights[pool]))
        end = int(ends[pool])
        for j in range(start, end):
            factors[j] = value
        start = end
    for j in range(start, z.size):
        factors[j] = 0.0


@compiled
def _end_of_positive_pools(z: FloatArray, v: float) -> int:
    total = 0.0
    largest = 0.0
    end = 0
    for j in range(z.size):
        total += z[j] * z[j] - v
        if total > largest:
            largest = total
            end = j + 1
    return end


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
def statistic_of(loss: float, risk: float, tau_squared: float) -> float:
    """(loss − R)/τ; where τ vanishes, its limit."""
    if tau_squared > 0.0:
        return float((loss - risk) / np.sqrt(tau_squared))
    if loss > risk:
        return np.inf
    return -np.inf if loss < risk else 0.0


@compiled
def write_statistics(
    truth: FloatArray,
    normal: FloatArray,
    scales: FloatArray,
    variances: FloatArray,
    freedom: float,
    nested: bool,
    found: FloatArray,
) -> None:
    """Write T' = (loss − R)/τ of each repeat Z' = truth + scales · normal into `found`, shape (B,)."""
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
