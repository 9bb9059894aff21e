"""What independent measurements say together."""

import math

import numpy as np
import pytest

from fits.engine.ball import exact_p_value, statistic_at
from fits.engine.draws import draw_noise
from fits.engine.joint import joint_of, joint_p_value
from fits.engine.settings import Shrinkage
from fits.engine.shrinkage import shrink

DRAWS = [2000, 2000]


def test_two_measurements_by_hand() -> None:
    # α^{1/2} of 0.95 is 0.974679…, so that each asks for p > 0.025321.
    joint = joint_of([0.04, 0.5], [0.93, 0.6], DRAWS, level=0.95)
    assert joint.measurements == 2
    assert joint.bound == pytest.approx(0.025320565519)
    assert joint.is_inside
    # 1 − 0.96² and 0.93².
    assert joint.p_value == pytest.approx(0.0784)
    assert joint.entry_level == pytest.approx(0.8649)


def test_inside_each_at_95_is_more_than_jointly_inside_asks_for() -> None:
    # Outside alone (0.04 ≤ 0.05), inside together: two measurements have two chances to miss.
    assert not joint_of([0.04], [0.96], [2000], level=0.95).is_inside
    assert joint_of([0.04, 0.04], [0.96, 0.96], DRAWS, level=0.95).is_inside


def test_one_measurement_that_rejects_it_is_enough() -> None:
    joint = joint_of([0.9, 0.02], [0.1, 0.98], DRAWS, level=0.95)
    assert not joint.is_inside
    assert joint.p_value == pytest.approx(1.0 - 0.98**2)


def test_one_measurement_alone_says_what_it_says_alone() -> None:
    assert not joint_of([0.05], [0.95], [2000], level=0.95).is_inside
    assert joint_of([0.0500001], [0.95], [2000], level=0.95).is_inside
    assert joint_p_value([0.3]) == pytest.approx(0.3)


@pytest.mark.parametrize("level", [0.67, 0.9, 0.95, 0.99])
def test_verdict_and_p_value_agree_at_every_level(level: float) -> None:
    for p_values in np.random.default_rng(2).uniform(0.0005, 0.3, (200, 3)):
        joint = joint_of(list(p_values), [0.5] * 3, [2000] * 3, level=level)
        assert joint.is_inside == (joint.p_value > 1.0 - level)


def test_a_sure_curve_has_the_joint_p_value_one() -> None:
    assert joint_p_value([1.0, 1.0]) == 1.0


def test_small_p_values_keep_their_digits() -> None:
    assert joint_p_value([1e-12, 0.5]) == pytest.approx(2e-12, rel=1e-9)


def test_a_p_value_within_the_error_of_its_simulation_leaves_the_verdict_open() -> None:
    # At 99 % and eight measurements each asks for p > 0.0012555, where 2000 draws are sure to 0.0008 only.
    rest = [0.5] * 7
    close = joint_of([0.0020, *rest], [0.5] * 8, [2000] * 8, level=0.99)
    assert close.bound == pytest.approx(0.0012555, abs=1e-7)
    assert close.is_inside
    assert not close.is_settled
    assert joint_of([0.0020, *rest], [0.5] * 8, [100_000] * 8, level=0.99).is_settled
    assert joint_of([0.1, *rest], [0.5] * 8, [2000] * 8, level=0.99).is_settled
    # Not one of 2000 repeats was as far off, and still the bound is too near.
    assert not joint_of([1 / 2001, *rest], [0.5] * 8, [2000] * 8, level=0.99).is_settled


@pytest.mark.parametrize(("level", "measurements"), [(0.95, 8), (0.99, 8), (0.99, 60), (0.67, 1)])
def test_a_verdict_that_is_called_settled_is_seldom_wrong(level: float, measurements: int) -> None:
    # p-values as simulated for curves at the very bound: either verdict is as wrong as the other.
    draws, bound = 2000, 1.0 - level ** (1.0 / measurements)
    beyond = np.random.default_rng(5).binomial(draws, bound, 4000)
    rest = [1.0] * (measurements - 1)
    joints = [
        joint_of(
            [(1 + count) / (draws + 1), *rest], [0.5] * measurements, [draws] * measurements, level=level
        )
        for count in beyond.tolist()
    ]
    for side in (True, False):
        settled = np.mean([joint.is_settled and joint.is_inside == side for joint in joints])
        # Three standard errors of 4000 repeats above 0.0228.
        assert settled < 0.03


def test_a_rejection_beyond_doubt_is_settled_whatever_the_others_say() -> None:
    bound = 1.0 - 0.95**0.5
    assert joint_of([0.001, bound + 0.0001], [0.999, 0.97], DRAWS, level=0.95).is_settled


def test_the_truth_is_jointly_inside_in_as_many_repeats_as_the_level_says() -> None:
    rng = np.random.default_rng(11)
    level, repeats, draws = 0.9, 600, 199
    truths = [
        (3.0 / (1.0 + np.arange(12.0)), 1 / 60),
        (np.array([1.0, -2.0, 0.0, 0.5, 0.0, 0.0, 0.3, 0.0]), 1 / 40),
    ]
    held = 0
    for _ in range(repeats):
        p_values = []
        for truth, variance in truths:
            z = truth + rng.normal(0.0, math.sqrt(variance), truth.size)
            shrunk = shrink(z, variance=variance, freedom=math.inf, shrinkage=Shrinkage.MONOTONE)
            statistic = statistic_at(float(np.linalg.norm(shrunk.factors * z - truth)), shrunk)
            noise = draw_noise(rng, draws=draws, functions=truth.size, variance=variance, freedom=math.inf)
            p_values.append(exact_p_value(truth, statistic, noise, shrinkage=Shrinkage.MONOTONE).value)
        held += joint_of(p_values, [0.5, 0.5], [draws, draws], level=level).is_inside
    # Three standard errors of 600 repeats: 0.9 ± 0.037; 199 draws are coarse enough to add a little.
    assert held / repeats == pytest.approx(level, abs=0.045)
