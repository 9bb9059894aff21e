import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fits.engine.ball import ball_of, empirical_quantile, exact_p_value, is_inside
from fits.engine.draws import draw_noise, statistics
from fits.engine.settings import DEFAULT_LEVELS, Shrinkage
from fits.engine.shrinkage import shrink
from tests.engine import slow


@settings(max_examples=200, deadline=None)
@given(
    seed=st.integers(0, 2**32 - 1),
    functions=st.integers(1, 30),
    n=st.integers(8, 400),
    nested=st.booleans(),
    freedom=st.sampled_from([np.inf, 15.0]),
)
def test_radii_and_p_values_are_those_of_a_slow_loop(
    seed: int, functions: int, n: int, nested: bool, freedom: float
) -> None:
    rng = np.random.default_rng(seed)
    v = 1.0 / n
    shrinkage = Shrinkage.NESTED if nested else Shrinkage.MONOTONE
    z = rng.normal(size=functions) / (1 + np.arange(functions))
    curve = z + rng.normal(size=functions) * math.sqrt(v)
    noise = draw_noise(rng, draws=25, functions=functions, variance=v, freedom=freedom)
    shrunk = shrink(z, variance=v, freedom=freedom, shrinkage=shrinkage)
    ball = ball_of(z, shrunk, noise, levels=DEFAULT_LEVELS, shrinkage=shrinkage)

    lam = slow.factors(z, v, nested=nested)
    risk, tau = slow.risk(z, v, lam), slow.tau(z, v, lam, freedom)
    repeats = [
        np.sort(slow.statistics(centre, noise.normal, v * noise.shares, v, nested=nested, freedom=freedom))
        for centre in (lam**0.25 * z, z, curve)
    ]
    for radius in ball.radii:
        smooth = repeats[0][math.ceil(radius.level * 25) - 1]
        higher = math.ceil((1 - 0.75 * (1 - radius.level)) * 25 - 1e-9) - 1
        cautious = max(repeats[0][higher], repeats[1][higher])
        assert radius.calibrated_squared == pytest.approx(risk + smooth * tau, rel=1e-7, abs=1e-9)
        assert radius.cautious_squared == pytest.approx(risk + cautious * tau, rel=1e-7, abs=1e-9)
    distance = float(np.linalg.norm(curve - lam * z))
    t = (distance**2 - risk) / tau
    p = exact_p_value(curve, ball.statistic(distance), noise, shrinkage=shrinkage)
    assert p.value == pytest.approx((1 + sum(repeat >= t for repeat in repeats[2])) / 26, abs=1.01 / 26)
    assert ball.published_entry_level(distance) == pytest.approx(0.5 * math.erfc(-t / math.sqrt(2)), abs=1e-8)


def test_a_curve_is_inside_the_calibrated_ball_exactly_when_its_entry_level_is_lower() -> None:
    rng = np.random.default_rng(2)
    z = np.array([3.0, 1.0, 0.3, 0.1, 0.0])
    noise = draw_noise(rng, draws=400, functions=5, variance=0.01, freedom=np.inf)
    shrunk = shrink(z, variance=0.01, freedom=np.inf, shrinkage=Shrinkage.MONOTONE)
    ball = ball_of(z, shrunk, noise, levels=DEFAULT_LEVELS, shrinkage=Shrinkage.MONOTONE)
    for distance in np.linspace(0.0, 0.6, 500):
        for radius in ball.radii:
            inside = is_inside(float(distance), radius.calibrated_squared)
            assert inside == (ball.calibrated_entry_level(float(distance)) < radius.level)


def test_the_same_seed_gives_the_same_bits() -> None:
    def run() -> bytes:
        noise = draw_noise(np.random.default_rng(7), draws=300, functions=20, variance=0.02, freedom=9.0)
        return statistics(np.linspace(1, 0, 20), noise, shrinkage=Shrinkage.MONOTONE).tobytes()

    assert run() == run()


def test_a_ball_of_negative_squared_radius_holds_nothing() -> None:
    assert not is_inside(0.0, -0.1)
    assert not is_inside(0.0, 0.0)
    assert is_inside(0.1, 0.01 + 1e-12)


def test_the_empirical_quantile_has_its_level_at_or_below_it() -> None:
    sample = np.arange(1.0, 101.0)
    assert empirical_quantile(sample, 0.95) == 95.0
    assert empirical_quantile(sample, 0.951) == 96.0


def test_exact_p_values_are_uniform_under_the_curve() -> None:
    """400 seeded repeats; the share of p ≤ 0.1 within three simulation errors of 0.1."""
    rng = np.random.default_rng(11)
    truth, v, repeats = np.array([2.0, 0.5, 0.3, 0.0, 0.0, 0.1]), 0.02, 400
    small = 0
    for _ in range(repeats):
        z = truth + rng.normal(size=6) * math.sqrt(v)
        noise = draw_noise(rng, draws=199, functions=6, variance=v, freedom=np.inf)
        shrunk = shrink(z, variance=v, freedom=np.inf, shrinkage=Shrinkage.MONOTONE)
        ball = ball_of(z, shrunk, noise, levels=(0.9,), shrinkage=Shrinkage.MONOTONE)
        distance = float(np.linalg.norm(truth - shrunk.factors * z))
        p = exact_p_value(truth, ball.statistic(distance), noise, shrinkage=Shrinkage.MONOTONE)
        small += p.value <= 0.1
    assert abs(small / repeats - 0.1) < 3 * math.sqrt(0.1 * 0.9 / repeats)
