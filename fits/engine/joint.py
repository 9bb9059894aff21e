"""What independent measurements say of a theory together.

With m of them the joint set at level α asks each for its set at α^{1/m}: the truth is in all of them with chance α.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import scipy.special

# A p-value that is simulated with more than this chance from one at the bound does not settle on which side it lies.
# It is the chance of two standard errors, which themselves would not do: so few repeats decide that their number is
# far from normal.
CHANCE_LEFT_OPEN = 0.0228


@dataclass(frozen=True)
class Joint:
    """The joint verdict on one theory at one level.

    measurements   m, those on which it is judged
    bound          1 − α^{1/m}: inside where every p-value exceeds it
    p_value        1 − (1 − min p)^m
    entry_level    (largest entry level)^m, from those of the calibrated balls
    is_settled     whether more draws could hardly turn the verdict
    """

    measurements: int
    bound: float
    p_value: float
    entry_level: float
    is_inside: bool
    is_settled: bool


def joint_bound(level: float, measurements: int) -> float:
    """1 − α^{1/m}; rounded, as 1 − 0.95 is not 0.05 in floating point."""
    return round(1.0 - math.pow(level, 1.0 / measurements), 12)


def joint_p_value(p_values: Sequence[float]) -> float:
    """1 − (1 − min p)^m, exact also where p is small."""
    smallest = min(p_values)
    return 1.0 if smallest >= 1.0 else -math.expm1(len(p_values) * math.log1p(-smallest))


def joint_of(
    p_values: Sequence[float], entry_levels: Sequence[float], draws: Sequence[int], *, level: float
) -> Joint:
    """The joint verdict from each measurement's exact p-value, calibrated entry level and number of draws."""
    count = len(p_values)
    bound = joint_bound(level, count)
    is_inside = all(p > bound for p in p_values)
    simulated = zip(p_values, draws, strict=True)
    if is_inside:
        is_settled = all(_is_surely_above(bound, p, of) for p, of in simulated)
    else:
        is_settled = any(_is_surely_below(bound, p, of) for p, of in simulated)
    return Joint(
        measurements=count,
        bound=bound,
        p_value=joint_p_value(p_values),
        entry_level=max(entry_levels) ** count,
        is_inside=is_inside,
        is_settled=is_settled,
    )


def _is_surely_above(bound: float, p_value: float, draws: int) -> bool:
    """Whether so many of the draws beyond the curve, or more, would hardly come from a p-value at the bound."""
    return float(scipy.special.bdtrc(_beyond(p_value, draws) - 1, draws, bound)) < CHANCE_LEFT_OPEN


def _is_surely_below(bound: float, p_value: float, draws: int) -> bool:
    """Whether so few of the draws, or fewer, would."""
    return float(scipy.special.bdtr(_beyond(p_value, draws), draws, bound)) < CHANCE_LEFT_OPEN


def _beyond(p_value: float, draws: int) -> int:
    """How many of the draws were as far off as the curve: p = (1 + this)/(draws + 1)."""
    return round(p_value * (draws + 1)) - 1
