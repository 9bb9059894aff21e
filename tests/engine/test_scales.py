import math

import numpy as np
import pytest
import scipy.stats

from fits.engine.scales import scale_sequence, scale_table


def test_the_sequence_grows_by_one_then_by_fifteen_percent_and_ends_with_all() -> None:
    assert scale_sequence(8) == (1, 2, 3, 4, 5, 6, 7, 8)
    assert scale_sequence(40) == (*range(1, 15), 16, 18, 20, 23, 26, 29, 33, 37, 40)
    assert scale_sequence(1) == (1,)


@pytest.mark.parametrize("freedom", [math.inf, 20.0])
def test_scale_p_values_are_uniform_under_the_curve(freedom: float) -> None:
    """4000 seeded curves; Kolmogorov–Smirnov by scipy."""
    rng = np.random.default_rng(3)
    table = scale_table(12, freedom)
    p_values = []
    for _ in range(4000):
        share = 1.0 if math.isinf(freedom) else rng.chisquare(freedom) / freedom
        p_values.append(table.misfit(rng.standard_normal(12) ** 2 / share).p_value)
    assert scipy.stats.kstest(p_values, "uniform").pvalue > 0.001


def test_a_known_error_size_is_the_limit_of_many_degrees_of_freedom() -> None:
    squares = np.array([0.5, 3.0, 1.0, 0.1, 6.0])
    many = scale_table(5, 1e9).misfit(squares)
    assert many.p_values == pytest.approx(scale_table(5).misfit(squares).p_values, rel=1e-6)


def test_the_f_tail_is_scipys() -> None:
    squares = np.array([0.5, 3.0, 1.0, 0.1, 6.0])
    found = scale_table(5, 14.0).misfit(squares)
    expected = scipy.stats.f.sf(np.cumsum(squares) / np.arange(1, 6), np.arange(1, 6), 14.0)
    assert found.p_values == pytest.approx(expected, rel=1e-12)


def test_a_curve_is_rejected_exactly_below_the_threshold() -> None:
    table = scale_table(6)
    for level in (0.67, 0.9, 0.95, 0.99):
        threshold = table.threshold(level)
        for smallest, inside in ((threshold, True), (np.nextafter(threshold, 0.0), False)):
            below = np.searchsorted(table.minima, smallest, side="right")
            p_value = (1.0 + below) / (table.minima.size + 1.0)
            assert bool(p_value > round(1.0 - level, 12)) == inside


def test_an_offset_in_the_first_coordinate_is_worst_at_the_widest_scale() -> None:
    squares = np.ones(20)
    squares[0] = 30.0
    misfit = scale_table(20).misfit(squares)
    assert misfit.functions[misfit.worst] == 1
    assert misfit.p_value < 0.001
