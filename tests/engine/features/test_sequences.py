import itertools

import numpy as np
import pytest
import scipy.optimize
from hypothesis import given, settings
from hypothesis import strategies as st

from fits.engine.data import FloatArray
from fits.engine.features.sequences import nearest_sequences


def segment_cost(y: FloatArray, weights: FloatArray, *, rising: bool) -> float:
    """By scipy's isotonic regression."""
    if y.size == 0:
        return 0.0
    fitted = scipy.optimize.isotonic_regression(y, weights=weights, increasing=rising).x
    return float(weights @ (y - fitted) ** 2)


def by_brute_force(y: FloatArray, weights: FloatArray, peaks: int) -> float:
    """All change points of fall, rise, fall, …, rise."""
    least = np.inf
    for inner in itertools.combinations_with_replacement(range(y.size + 1), 2 * peaks + 1):
        ends = (0, *inner, y.size)
        cost = sum(
            segment_cost(y[start:end], weights[start:end], rising=place % 2 == 1)
            for place, (start, end) in enumerate(itertools.pairwise(ends))
        )
        least = min(least, cost)
    return least


@settings(max_examples=30, deadline=None)
@given(seed=st.integers(0, 2**32 - 1), n=st.integers(1, 9))
def test_costs_are_those_of_all_change_points(seed: int, n: int) -> None:
    rng = np.random.default_rng(seed)
    y, weights = rng.normal(size=n), rng.uniform(0.1, 3.0, n)
    found = nearest_sequences(y, weights, most=1)
    assert found.cost == pytest.approx([by_brute_force(y, weights, peaks) for peaks in (0, 1)], abs=1e-9)


@settings(max_examples=50, deadline=None)
@given(seed=st.integers(0, 2**32 - 1), n=st.integers(2, 60))
def test_no_peak_costs_what_scipys_regressions_on_both_sides_of_the_best_turn_cost(seed: int, n: int) -> None:
    rng = np.random.default_rng(seed)
    y, weights = rng.normal(size=n), rng.uniform(0.1, 3.0, n)
    expected = min(
        segment_cost(y[:turn], weights[:turn], rising=False)
        + segment_cost(y[turn:], weights[turn:], rising=True)
        for turn in range(n + 1)
    )
    assert nearest_sequences(y, weights, most=0).cost[0] == pytest.approx(expected, abs=1e-9)


def test_change_points_lead_back_to_the_cost() -> None:
    rng = np.random.default_rng(5)
    y, weights = rng.normal(size=80), rng.uniform(0.1, 3.0, 80)
    found = nearest_sequences(y, weights, most=4)
    for peaks, changes in enumerate(found.changes):
        ends = (0, *changes, 80)
        cost = sum(
            segment_cost(y[start:end], weights[start:end], rising=place % 2 == 1)
            for place, (start, end) in enumerate(itertools.pairwise(ends))
        )
        assert len(changes) == 2 * peaks + 1
        assert cost == pytest.approx(found.cost[peaks], abs=1e-9)


def test_more_peaks_never_cost_more() -> None:
    y = np.random.default_rng(6).normal(size=100)
    costs = nearest_sequences(y, np.ones(100), most=8).cost
    assert (np.diff(costs) <= 1e-12).all()


def test_a_sequence_with_two_peaks_costs_nothing_at_two() -> None:
    y = np.array([5.0, 1.0, 3.0, 2.0, 2.0, 4.0, 0.0, 1.0])
    costs = nearest_sequences(y, np.ones(8), most=3).cost
    assert costs[1] > 0.0
    assert costs[2] == costs[3] == 0.0
