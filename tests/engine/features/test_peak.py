import numpy as np
import pytest

from fits.engine.assess import assess
from fits.engine.data import validated_data
from fits.engine.features.find import (
    Range,
    feature_case,
    find_peak,
    sample_reach,
    windows_of,
)
from fits.engine.features.peak import height_map, highest, lowest_maximum, no_peak, peak_profile
from fits.engine.features.programme import Programme
from fits.engine.features.samples import samples
from fits.engine.features.space import interior_peaks, standing_turns, window_between
from fits.engine.refusal import InputRefused
from fits.engine.settings import Settings
from tests.engine.features.cases import lines, two_peaks

CASE = two_peaks()
SPACE = CASE.space
FIRST = window_between(SPACE, 0.1, 0.5)


def test_slopes_are_the_derivatives_of_the_functions() -> None:
    basis = CASE.result.fit.coordinates.basis
    step = 1e-6
    t = np.array([0.2, 0.5, 0.9])
    low, high = (
        CASE.result.fit.coordinates.interval.grid(101)[[20, 50, 90]] + shift for shift in (-step, step)
    )
    assert (basis.at(high) - basis.at(low)) / (2 * step) == pytest.approx(
        basis.slopes_at(t), rel=1e-4, abs=1e-4
    )


def test_the_price_is_lowest_where_the_fit_has_its_peak() -> None:
    profile = peak_profile(SPACE, FIRST)
    top = SPACE.grid[FIRST.first + int(SPACE.fit[FIRST.points].argmax())]
    assert profile.x[int(np.argmin(profile.price))] == pytest.approx(top, abs=0.006)
    assert profile.price.min() < 0.05


def test_the_curve_at_a_price_has_its_peak_there_and_lies_at_that_distance() -> None:
    index = FIRST.first + 20
    slope = SPACE.slopes[index : index + 1]
    below = np.delete(SPACE.values[FIRST.points], 20, axis=0) - SPACE.values[index]
    found = Programme(slope, below).solve(-(slope @ SPACE.centre), -(below @ SPACE.centre))
    curve = SPACE.values @ (SPACE.centre + found.difference)
    assert curve[FIRST.points].max() == pytest.approx(curve[index], abs=1e-7)
    assert np.linalg.norm(found.difference) == pytest.approx(peak_profile(SPACE, FIRST).price[19], rel=1e-6)


def test_a_dip_is_a_peak_upside_down() -> None:
    window = window_between(SPACE, 0.35, 0.65)
    upside_down = type(SPACE)(SPACE.grid, SPACE.values, SPACE.slopes, -SPACE.centre)
    dip, peak = peak_profile(SPACE, window, sign=-1.0), peak_profile(upside_down, window)
    assert dip.price == pytest.approx(peak.price, rel=1e-6, abs=1e-8)


def test_intervals_hold_the_ranges_of_samples() -> None:
    radius = CASE.radii[2]
    drawn = samples(SPACE.centre, radius, count=20_000, rng=np.random.default_rng(2)) @ SPACE.values.T
    on_window = drawn[:, FIRST.points]
    tops = on_window.max(axis=1)
    assert lowest_maximum(SPACE, FIRST, radius) <= tops.min()
    assert highest(SPACE, FIRST, radius) >= tops.max()
    place = on_window.argmax(axis=1)
    inner = (place > 0) & (place < on_window.shape[1] - 1)
    places = SPACE.grid[FIRST.points][place[inner]]
    feature = find_peak(CASE, FIRST, with_map=False)
    stretches = feature.location[2]
    step = SPACE.grid[1] - SPACE.grid[0]
    # A sample's highest grid point lies within a grid step of its peak.
    assert places.min() >= stretches[0].low - step
    assert places.max() <= stretches[-1].high + step


def test_samples_reach_only_part_of_the_exact_range() -> None:
    feature = find_peak(CASE, FIRST, with_map=False)
    reach = sample_reach(CASE, FIRST, feature.height[2], level=0.95, rng=np.random.default_rng(3))
    assert reach.exact.low < reach.sampled.low < reach.sampled.high < reach.exact.high
    assert 0.2 < reach.share < 0.98


def test_samples_of_a_dip_are_those_of_the_peak_upside_down() -> None:
    reach = sample_reach(CASE, FIRST, Range(-1.0, 1.0), level=0.95, rng=np.random.default_rng(3), sign=-1.0)
    drawn = samples(SPACE.centre, CASE.radii[2], count=50_000, rng=np.random.default_rng(3))
    on_window = drawn @ SPACE.values[FIRST.points].T
    assert (reach.sampled.low, reach.sampled.high) == pytest.approx(
        (on_window.min(axis=1).min(), on_window.min(axis=1).max())
    )
    assert reach.tops[7] == pytest.approx(
        (SPACE.grid[FIRST.points][on_window[7].argmin()], on_window[7].min())
    )


def test_samples_fill_the_ball_evenly() -> None:
    drawn = samples(np.zeros(6), 2.0, count=20_000, rng=np.random.default_rng(1))
    lengths = np.linalg.norm(drawn, axis=1)
    assert lengths.max() <= 2.0
    # Half of the volume lies within 2^(−1/6) of the radius.
    assert np.mean(lengths <= 2.0 * 0.5 ** (1 / 6)) == pytest.approx(0.5, abs=0.015)


def test_the_lowest_maximum_costs_exactly_the_radius() -> None:
    radius = CASE.radii[2]
    height = lowest_maximum(SPACE, FIRST, radius)
    below = SPACE.values[FIRST.points]
    programme = Programme(np.empty((0, below.shape[1])), below)
    price = programme.solve(np.empty(0), height - below @ SPACE.centre).price
    assert price == pytest.approx(radius, rel=1e-5)


def test_the_map_is_exact_below_its_bound_and_a_bound_above() -> None:
    basis = CASE.result.fit.coordinates.basis
    x = np.linspace(0.2, 0.4, 7)
    heights = np.linspace(3.0, 7.0, 9)
    given = {"x": x, "slopes": basis.slopes_at(x), "values": basis.at(x), "heights": heights}
    limit = CASE.largest_radius
    found = height_map(SPACE, FIRST, exact_below=limit, **given)  # type: ignore[arg-type]
    exact = height_map(SPACE, FIRST, exact_below=np.inf, **given)  # type: ignore[arg-type]
    affordable = exact.price <= limit
    assert affordable.any()
    assert found.price[affordable] == pytest.approx(exact.price[affordable], rel=1e-6, abs=1e-7)
    assert (found.price <= exact.price * (1 + 1e-6)).all()
    assert (found.price[~affordable] > limit).all()


def test_a_map_never_undercuts_the_profile_of_its_place() -> None:
    basis = CASE.result.fit.coordinates.basis
    index = FIRST.first + 25
    x = SPACE.grid[index : index + 1]
    found = height_map(
        SPACE,
        FIRST,
        x=x,
        slopes=basis.slopes_at(x),
        values=basis.at(x),
        heights=np.linspace(2.0, 8.0, 200),
        exact_below=np.inf,
    )
    profile = peak_profile(SPACE, FIRST).price[24]
    assert found.price.min() >= profile - 1e-6
    assert found.price.min() == pytest.approx(profile, abs=0.05)


def test_no_peak_is_the_cheapest_over_all_turning_points() -> None:
    steps = np.diff(SPACE.values[FIRST.points], axis=0)
    prices = []
    for turn in range(steps.shape[0] + 1):
        below = np.where(np.arange(steps.shape[0]) < turn, 1.0, -1.0)[:, None] * steps
        prices.append(
            Programme(np.empty((0, steps.shape[1])), below).solve(np.empty(0), -(below @ SPACE.centre)).price
        )
    assert no_peak(SPACE, FIRST).price == pytest.approx(min(prices), rel=1e-6)
    # Monotone curves alone would be dearer, and the peak look more demanded than it is.
    assert min(prices) < min(prices[0], prices[-1])


def test_a_window_on_a_slope_needs_no_peak() -> None:
    slope = window_between(SPACE, 0.22, 0.27)
    assert no_peak(SPACE, slope).price == 0.0


def test_windows_run_between_the_dips_that_stand_out() -> None:
    first, second = windows_of(CASE)
    assert SPACE.grid[first.first] < 0.3 < SPACE.grid[first.last] == SPACE.grid[second.first]
    assert SPACE.grid[second.first] == pytest.approx(0.5, abs=0.08)
    assert SPACE.grid[second.first] < 0.7 < SPACE.grid[second.last]


def test_a_ripple_that_the_ball_can_do_without_opens_no_window() -> None:
    ripples = interior_peaks(SPACE.fit).size
    assert ripples > 2
    assert len(standing_turns(SPACE, 0.0)) > len(standing_turns(SPACE, CASE.least_rise)) == 5
    assert standing_turns(SPACE, 1e9) == [0, SPACE.grid.size - 1]


def test_an_end_at_which_the_curve_is_hardly_known_hides_no_peak() -> None:
    x = np.linspace(0.0, 1.0, 60)
    y = lines(x, np.array([0.3, 0.7]), np.array([3.0, 2.0]), 0.07) + 0.3 * np.random.default_rng(5).normal(
        size=60
    )
    # Within a bin's width of the ends hardly anything is known: a fall to the end costs next to nothing to level.
    data = validated_data(x, y, errors=np.full(60, 0.3), low=x - 0.03, high=x + 0.03)
    case = feature_case(assess(data, [], Settings(resolution=20, draws=100), rng=np.random.default_rng(1)))
    tops = [case.space.grid[turn] for turn in standing_turns(case.space, case.least_rise)]
    assert any(abs(top - 0.3) < 0.03 for top in tops)
    assert any(abs(top - 0.7) < 0.03 for top in tops)
    assert len(windows_of(case)) >= 2


def test_a_flat_top_counts_once_and_ends_never() -> None:
    assert interior_peaks(np.array([3.0, 1.0, 2.0, 2.0, 2.0, 0.0, 5.0])).tolist() == [3]
    assert interior_peaks(np.array([1.0, 2.0, 3.0])).size == 0


@pytest.mark.parametrize(
    ("windows", "code"),
    [
        ([(0.5, 0.1)], "window-reversed"),
        ([(-1.0, 0.5)], "window-outside"),
        ([(0.5, 1.5)], "window-outside"),
        ([(0.5, 0.506)], "window-narrow"),
        ([(0.1, 0.5)] * 51, "too-many-windows"),
        ([(float("nan"), 0.5)], "window-reversed"),
    ],
)
def test_bad_windows_are_refused(windows: list[tuple[float, float]], code: str) -> None:
    with pytest.raises(InputRefused) as refusal:
        windows_of(CASE, windows)
    assert refusal.value.code == code


def test_every_statement_holds_for_the_fit_itself() -> None:
    feature = find_peak(CASE, FIRST)
    top = SPACE.grid[FIRST.first + int(SPACE.fit[FIRST.points].argmax())]
    for stretches, height in zip(feature.location, feature.height, strict=True):
        assert any(stretch.low <= top <= stretch.high for stretch in stretches)
        assert height.low <= SPACE.fit[FIRST.points].max() <= height.high
    assert feature.window == Range(float(SPACE.grid[FIRST.first]), float(SPACE.grid[FIRST.last]))
