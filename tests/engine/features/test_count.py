import numpy as np
import pytest

from fits.engine.assess import assess
from fits.engine.data import FloatArray, validated_data
from fits.engine.features import points as points_module
from fits.engine.features.count import peak_count
from fits.engine.features.find import count_peaks, feature_case, find_spacing
from fits.engine.features.points import compared_points, correlation_bound
from fits.engine.features.space import interior_peaks
from fits.engine.settings import Settings
from fits.engine.whitening import CorrelatedErrors, IndependentErrors, cholesky
from fits.engine.windows import Windows
from tests.engine.features.cases import case_of, lines, two_peaks


def test_two_clear_peaks_are_demanded_and_a_third_is_not() -> None:
    case = two_peaks()
    count = count_peaks(case)
    assert count.at_most[0].lower > count.at_most[1].lower > case.largest_radius
    assert count.at_most[-1].upper == 0.0


def test_bounds_enclose_each_other_and_witnesses_keep_their_word() -> None:
    for seed in range(4):
        case = two_peaks(seed=seed, error=1.0)
        for entry in count_peaks(case).at_most:
            assert entry.lower <= entry.upper + 1e-9
            if entry.witness is not None:
                assert interior_peaks(np.round(entry.witness, 6)).size <= entry.peaks


def test_a_witness_lies_at_its_price_from_the_fit() -> None:
    case = two_peaks()
    entry = count_peaks(case).at_most[1]
    assert entry.witness is not None
    difference, *_ = np.linalg.lstsq(case.space.values, entry.witness - case.space.fit, rcond=None)
    assert np.linalg.norm(difference) == pytest.approx(entry.upper, rel=1e-6)


def test_dips_are_counted_upside_down() -> None:
    x = np.linspace(0.0, 1.0, 100)
    case = case_of(x, -lines(x, np.array([0.3, 0.7]), np.array([4.0, 3.0]), 0.08), 0.1)
    dips = count_peaks(case, sign=-1.0)
    assert dips.at_most[1].lower > case.largest_radius
    assert dips.at_most[2].lower < dips.at_most[2].upper < case.radii[0]


def test_the_correlation_bound_is_at_least_the_largest_eigenvalue() -> None:
    rng = np.random.default_rng(3)
    sigma = rng.uniform(0.5, 2.0, 25)
    correlation = 0.5 ** np.abs(np.subtract.outer(np.arange(25), np.arange(25)))
    dense = CorrelatedErrors(cholesky(correlation * np.outer(sigma, sigma)))
    largest = np.linalg.eigvalsh(correlation)[-1]
    assert correlation_bound(dense) == pytest.approx(largest, rel=1e-6)
    shared = IndependentErrors(sigma).with_shared(rng.normal(size=(25, 2)))
    total = np.diag(sigma**2) + shared.columns @ shared.columns.T  # type: ignore[attr-defined]
    scale = np.sqrt(np.diag(total))
    assert correlation_bound(shared) >= np.linalg.eigvalsh(total / np.outer(scale, scale))[-1] - 1e-9


def test_correlated_errors_lower_the_bound_and_never_lift_it_above_the_witness() -> None:
    x = np.linspace(0.0, 1.0, 100)
    y = lines(x, np.array([0.3, 0.7]), np.array([4.0, 3.0]), 0.08)
    covariance = 0.04 * 0.6 ** np.abs(np.subtract.outer(np.arange(100), np.arange(100)))
    settings = Settings(resolution=30, draws=200)
    result = assess(validated_data(x, y, covariance=covariance), [], settings, rng=np.random.default_rng(1))
    entry = count_peaks(feature_case(result)).at_most[1]
    assert 0.0 < entry.lower < entry.upper


def test_pooling_points_lowers_the_bound_by_no_more_than_it_says(monkeypatch: pytest.MonkeyPatch) -> None:
    case = two_peaks(n=600)
    whole = count_peaks(case)
    monkeypatch.setattr(points_module, "MOST_POINTS", 60)
    pooled = count_peaks(case)
    assert whole.thinning == 0.0
    assert pooled.thinning > 0.0
    for full, thin in zip(whole.at_most, pooled.at_most, strict=True):
        assert thin.lower <= full.lower + 1e-9
        assert full.lower**2 <= thin.lower**2 + pooled.thinning**2 + 1e-9


def test_points_that_share_an_x_are_one() -> None:
    x = np.repeat(np.linspace(0.0, 1.0, 40), 3)
    case = case_of(x, lines(x, np.array([0.5]), np.array([3.0]), 0.1), 0.2, resolution=20)
    points = compared_points(case.result, case.space)
    assert points.x.size == 40
    assert points.weights == pytest.approx(np.full(40, 3 / (120 * 0.04)))


def test_points_that_see_through_windows_are_compared_on_the_grid() -> None:
    grid = np.linspace(0.0, 1.0, 101)
    x = np.linspace(0.1, 0.9, 60)
    weights = np.exp(-(((grid - x[:, None]) / 0.03) ** 2))
    weights /= weights.sum(axis=1, keepdims=True)
    y = weights @ lines(grid, np.array([0.3, 0.7]), np.array([6.0, 6.0]), 0.1)
    data = validated_data(x, y, errors=np.full(60, 0.1), windows=Windows(grid, weights))
    result = assess(data, [], Settings(resolution=16, draws=200), rng=np.random.default_rng(1))
    case = feature_case(result)
    entry = count_peaks(case).at_most[1]
    assert 0.1 < entry.lower < entry.upper


def test_exact_harmonic_peaks_show_their_spacing() -> None:
    x = np.linspace(0.0, 1.0, 300)
    places: FloatArray = 0.15 * np.arange(1.0, 6.0)
    case = case_of(
        x,
        lines(x, places, np.full(5, 3.0), 0.04) + 0.1 * np.random.default_rng(2).normal(size=300),
        0.1,
        resolution=50,
    )
    for harmonic in (False, True):
        profile = find_spacing(case, harmonic=harmonic)
        assert profile is not None
        best = int(np.argmin(profile.price))
        assert profile.spacing[best] == pytest.approx(0.15, abs=0.003)
        assert profile.price[best] < case.radii[2]


@pytest.mark.parametrize(("error", "rejected"), [(2.0, False), (0.015, True)])
def test_peaks_at_roots_of_k_times_k_plus_one_reject_even_spacing_once_the_errors_are_small(
    error: float, rejected: bool
) -> None:
    x = np.linspace(0.0, 1.0, 300)
    k = np.arange(1.0, 6.0)
    places: FloatArray = 0.16 * np.sqrt(k * (k + 1)) - 0.05
    y = lines(x, places, np.full(5, 3.0), 0.04) + error * np.random.default_rng(4).normal(size=300)
    case = case_of(x, y, error, resolution=50)
    profile = find_spacing(case)
    if profile is None:
        assert not rejected
    else:
        assert bool(np.nanmin(profile.price) > case.largest_radius) is rejected


def test_two_peaks_have_no_spacing_to_speak_of() -> None:
    assert find_spacing(two_peaks()) is None


def test_truth_is_contradicted_no_more_often_than_the_level_allows(
    capsys: pytest.CaptureFixture[str],
) -> None:
    """300 seeded repeats of two peaks; level 90 % (calibrated): location, height and count of the truth."""
    from fits.engine.features.find import find_peak, windows_of

    repeats, wrong = 300, {"location": 0, "height": 0, "count": 0}
    x = np.linspace(0.0, 1.0, 80)
    truth = lines(x, np.array([0.3, 0.7]), np.array([4.0, 3.0]), 0.1)
    for seed in range(repeats):
        y = truth + 0.8 * np.random.default_rng(seed).normal(size=x.size)
        data = validated_data(x, y, errors=np.full(x.size, 0.8))
        settings = Settings(resolution=16, draws=200, levels=(0.9,))
        case = feature_case(assess(data, [], settings, rng=np.random.default_rng(seed)))
        (window,) = windows_of(case, [(0.12, 0.48)])
        feature = find_peak(case, window, with_map=False)
        wrong["location"] += not any(stretch.low <= 0.3 <= stretch.high for stretch in feature.location[0])
        wrong["height"] += not feature.height[0].low <= truth.max() <= feature.height[0].high
        points = compared_points(case.result, case.space)
        count = peak_count(case.space, points, radii=(), most=2)
        wrong["count"] += len(count.at_most) > 2 and count.at_most[2].lower > case.radii[0]
    with capsys.disabled():
        print(f"\n  contradicted in {repeats} repeats at 90 %: {wrong}")  # noqa: T201
    allowed = 0.1 + 3 * np.sqrt(0.1 * 0.9 / repeats)
    assert all(times / repeats <= allowed for times in wrong.values())
