"""Data so precise that a peak's place is known to less than a step of the grid."""

from dataclasses import replace

import numpy as np
import pytest

from fits.engine.features.find import FeatureCase, find_peak, find_spacing, windows_of
from fits.engine.features.intervals import intervals_below
from fits.engine.features.narrow import top_of_fit
from fits.engine.features.space import Window
from tests.engine.features.cases import case_of, lines

# No multiple of the grid's step, 1/200.
SPACING = 0.2513
PLACES = SPACING * np.arange(1.0, 4.0)


def precise(error: float) -> FeatureCase:
    """Three peaks at whole multiples of one spacing, between the points of the grid."""
    x = np.linspace(0.0, 1.0, 400)
    truth = lines(x, PLACES, np.ones(3), 0.07)
    return case_of(x, truth + error * np.random.default_rng(1).normal(size=x.size), error, resolution=40)


def high_windows(case: FeatureCase) -> list[Window]:
    return [window for window in windows_of(case) if case.space.fit[window.points].max() > 1.5]


@pytest.mark.parametrize("error", [1.0 / 400.0, 1.0 / 5000.0])
def test_a_peak_that_is_known_to_less_than_a_step_of_the_grid_is_somewhere(error: float) -> None:
    case = precise(error)
    step = case.space.grid[1] - case.space.grid[0]
    windows = high_windows(case)
    assert len(windows) == 3
    for window, truth in zip(windows, PLACES, strict=True):
        found = find_peak(case, window, with_map=False)
        assert found.no_peak > case.largest_radius
        for stretches in found.location:
            (only,) = stretches
            assert only.high - only.low < step
        assert found.location[-1][0].low <= truth <= found.location[-1][0].high


def test_the_ends_of_such_an_interval_cost_the_radius() -> None:
    case = precise(1.0 / 400.0)
    basis, space = case.result.fit.coordinates.basis, case.space
    window = high_windows(case)[0]
    (only,) = find_peak(case, window, with_map=False).location[2]
    top = top_of_fit(space, basis, window)
    assert top is not None
    for end in (only.low, only.high):
        # A level slope there is all that is asked so close to the top: its price has a closed form.
        slope = basis.slopes_at(np.array([end]))[0]
        price = abs(slope @ space.centre) / np.linalg.norm(slope)
        assert price == pytest.approx(case.radii[2], rel=0.02)
    assert only.low < top < only.high


def test_a_place_that_the_grid_tells_is_left_to_the_grid() -> None:
    case = precise(0.1)
    window = high_windows(case)[0]
    assert find_peak(case, window, with_map=False).profile.x.size == window.last - window.first - 1


@pytest.mark.parametrize("error", [1.0 / 20.0, 1.0 / 400.0, 1.0 / 2000.0])
@pytest.mark.parametrize("harmonic", [False, True])
def test_a_true_even_spacing_is_not_rejected_however_precise_the_data(error: float, harmonic: bool) -> None:
    case = precise(error)
    profile = find_spacing(case, harmonic=harmonic)
    assert profile is not None
    assert (np.diff(profile.spacing) > 0.0).all()
    ((low, high),) = intervals_below(profile.spacing, profile.price, case.radii[2])
    assert low <= SPACING <= high


def test_a_rise_that_the_ball_can_do_without_is_not_asked_of_a_series() -> None:
    case = precise(0.1)
    assert find_spacing(case) is not None
    can_do_without = replace(case, levels=(0.95,), radii=(1000.0,))
    # Windows are opened all the same.
    assert len(windows_of(can_do_without)) == len(windows_of(case)) >= 3
    assert find_spacing(can_do_without) is None
