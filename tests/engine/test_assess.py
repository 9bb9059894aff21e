import numpy as np
import pytest

from fits.engine.assess import Stage, assess
from fits.engine.data import Axis, CurveTable, Data, ErrorSource, FloatArray, validated_curve, validated_data
from fits.engine.refusal import InputRefused
from fits.engine.result import Result
from fits.engine.settings import Settings

X = np.linspace(0.5, 4.0, 60)


def spectrum(x: FloatArray) -> FloatArray:
    return np.asarray(2.0 * np.exp(-(((x - 1.5) / 0.4) ** 2)) + np.exp(-(((x - 3.0) / 0.4) ** 2)) + 1.0 / x)


def noisy(seed: int = 1) -> FloatArray:
    return np.asarray(spectrum(X) + np.random.default_rng(seed).normal(0.0, 0.1, X.size))


def given(**options: object) -> Data:
    return validated_data(X, noisy(), errors=np.full(X.size, 0.1), **options)  # type: ignore[arg-type]


def curve(name: str, values: FloatArray, x: FloatArray = X) -> CurveTable:
    return validated_curve(name, x, values)


def run(data: Data, curves: list[CurveTable], **settings: object) -> Result:
    chosen = Settings(draws=500, **settings)  # type: ignore[arg-type]
    return assess(data, curves, chosen, rng=np.random.default_rng(1))


def test_the_same_seed_gives_the_same_verdicts_to_the_bit() -> None:
    curves = [curve("true", spectrum(X)), curve("offset", spectrum(X) + 0.2)]
    first, second = run(given(), curves), run(given(), curves)
    for one, other in zip(first.verdicts, second.verdicts, strict=True):
        assert one.distance == other.distance
        assert one.p_value == other.p_value
    assert first.ball.radii == second.ball.radii


def test_a_verdict_does_not_depend_on_the_other_curves() -> None:
    true, offset = curve("true", spectrum(X)), curve("offset", spectrum(X) + 0.2)
    alone = run(given(), [true]).verdicts[0]
    among = run(given(), [offset, true, offset]).verdicts[1]
    assert alone.p_value == among.p_value


def test_the_unit_of_y_does_not_matter() -> None:
    scaled = validated_data(X, 1000.0 * noisy(), errors=np.full(X.size, 100.0))
    one = run(given(), [curve("true", spectrum(X))])
    other = run(scaled, [curve("true", 1000.0 * spectrum(X))])
    assert one.verdicts[0].distance == pytest.approx(other.verdicts[0].distance, rel=1e-9)
    assert one.ball.radii[2].calibrated == pytest.approx(other.ball.radii[2].calibrated, rel=1e-9)


def test_the_order_of_the_points_does_not_matter() -> None:
    order = np.random.default_rng(3).permutation(X.size)
    shuffled = validated_data(X[order], noisy()[order], errors=np.full(X.size, 0.1))
    one, other = (run(data, [curve("true", spectrum(X))]).verdicts[0] for data in (given(), shuffled))
    assert one.distance == pytest.approx(other.distance, rel=1e-9)


def test_an_error_column_and_its_diagonal_covariance_are_the_same() -> None:
    diagonal = validated_data(X, noisy(), covariance=np.diag(np.full(X.size, 0.01)))
    one, other = (run(data, [curve("true", spectrum(X))]).verdicts[0] for data in (given(), diagonal))
    assert one.distance == pytest.approx(other.distance, rel=1e-9)
    assert one.p_value == other.p_value


def test_a_shared_error_is_its_outer_product_in_the_covariance() -> None:
    shift = np.full(X.size, 0.3)
    shared = given(shared={"baseline": shift})
    dense = validated_data(X, noisy(), covariance=np.diag(np.full(X.size, 0.01)) + np.outer(shift, shift))
    lifted = curve("lifted", spectrum(X) + 0.3)
    one, other = (run(data, [lifted]).verdicts[0] for data in (shared, dense))
    assert one.distance == pytest.approx(other.distance, rel=1e-9)
    assert one.distance < run(given(), [lifted]).verdicts[0].distance


def test_points_that_are_bins_judge_the_curves_averages() -> None:
    low, high = X - 0.03, X + 0.03
    fine = np.linspace(0.4, 4.1, 4001)
    steep = fine**6
    means = (high**7 - low**7) / 7 / (high - low)
    data = validated_data(X, means, errors=np.full(X.size, 1e-3), low=low, high=high)
    verdict = run(data, [curve("power", steep, fine)]).verdicts[0]
    assert verdict.at_data == pytest.approx(means, abs=1e-9)
    assert not np.allclose(X**6, means, atol=1e-3)


def test_a_curve_that_does_not_reach_is_refused_with_the_missing_stretch() -> None:
    short = curve("short", spectrum(X[:50]), X[:50])
    with pytest.raises(InputRefused) as refusal:
        run(given(), [short])
    assert refusal.value.code == "curve-too-short"
    assert refusal.value.field == "curve short"
    assert f"from {X[49]:.6g} to 4 is missing" in refusal.value.reason


def test_a_coarse_grid_shows_in_the_interpolation_error() -> None:
    coarse = np.linspace(0.5, 4.0, 15)
    verdict = run(given(), [curve("coarse", spectrum(coarse), coarse)]).verdicts[0]
    fine = np.linspace(0.5, 4.0, 701)
    assert verdict.interpolation_error > 0.05
    assert run(given(), [curve("fine", spectrum(fine), fine)]).verdicts[0].interpolation_error < 0.01


def test_a_curve_finer_than_the_resolution_carries_it_as_its_own_leftover() -> None:
    ripple = 0.2 * np.sin(40 * np.pi * (X - 0.5) / 3.5)
    verdict = run(given(), [curve("ripple", spectrum(X) + ripple)], resolution=12).verdicts[0]
    assert verdict.leftover is not None
    assert verdict.leftover.root_mean_square(X.size) == pytest.approx(2.0 / np.sqrt(2), rel=0.2)


def test_equal_curves_have_an_unsettled_order() -> None:
    result = run(
        given(), [curve("one", spectrum(X)), curve("other", spectrum(X)), curve("far", 5 + spectrum(X))]
    )
    assert result.ranking.order == (0, 1, 2)
    assert [pair.settled for pair in result.ranking.neighbours] == [False, True]
    assert [result.ranking.is_settled(index) for index in range(3)] == [False, False, True]


def test_overstated_errors_empty_the_ball() -> None:
    x = np.linspace(0.0, 1.0, 100)
    data = validated_data(x, np.zeros(100), errors=np.ones(100))
    result = run(data, [curve("zero", np.zeros(2), np.array([0.0, 1.0]))], levels=(0.67,))
    assert result.fit.leftover is not None
    assert result.fit.leftover.p_value > 0.999
    assert result.ball.radii[0].published == 0.0


def test_estimated_errors_are_near_the_true_ones() -> None:
    data = validated_data(X, noisy(), source=ErrorSource.ESTIMATE)
    result = run(data, [curve("true", spectrum(X))], resolution=20)
    assert result.sigma == pytest.approx(0.1, rel=0.35)
    assert result.fit.freedom == 40
    assert result.fit.leftover is None


def test_relative_errors_are_the_given_ones_up_to_their_size() -> None:
    relative = validated_data(X, noisy(), errors=np.full(X.size, 7.0), source=ErrorSource.ESTIMATE)
    plain = validated_data(X, noisy(), source=ErrorSource.ESTIMATE)
    one, other = (run(data, [curve("true", spectrum(X))], resolution=20) for data in (relative, plain))
    assert one.sigma is not None
    assert one.sigma * 7.0 == pytest.approx(other.sigma, rel=1e-9)
    assert one.verdicts[0].distance == pytest.approx(other.verdicts[0].distance, rel=1e-9)


def test_errors_cannot_be_estimated_from_nothing_left_over() -> None:
    data = validated_data(X, noisy(), source=ErrorSource.ESTIMATE)
    with pytest.raises(InputRefused, match="degrees of freedom are left"):
        run(data, [curve("true", spectrum(X))], full=True)


def test_counts_and_their_curve_go_through_the_same_transform() -> None:
    expected = 200.0 * spectrum(X)
    counts = np.random.default_rng(5).poisson(expected).astype(float)
    result = run(validated_data(X, counts, source=ErrorSource.COUNTS), [curve("true", expected)])
    assert result.fit.leftover is not None
    assert 0.001 < result.fit.leftover.p_value < 0.999
    assert result.verdicts[0].p_value.value > 0.01


def test_a_resolution_above_the_number_of_points_is_cut_to_it() -> None:
    result = run(given(), [curve("true", spectrum(X))], resolution=500)
    assert result.fit.coordinates.functions == X.size
    assert result.fit.leftover is None


def test_a_feature_width_sets_the_number_of_functions() -> None:
    assert run(given(), [curve("true", spectrum(X))], feature_width=0.5).fit.coordinates.functions == 14


def test_full_resolution_is_refused_above_3000_points() -> None:
    x = np.linspace(0, 1, 3001)
    data = validated_data(x, x, errors=np.ones(3001))
    with pytest.raises(InputRefused, match="at most 3000"):
        run(data, [curve("line", x, x)], full=True)


def test_the_word_in_between_goes_through_all_stages_and_can_end_the_work() -> None:
    stages: list[Stage] = []
    curves = [curve("true", spectrum(X))] * 3
    assess(
        given(),
        curves,
        Settings(draws=200),
        rng=np.random.default_rng(1),
        progress=lambda stage, _: stages.append(stage),
    )
    assert list(dict.fromkeys(stages)) == list(Stage)

    def stop(stage: Stage, fraction: float) -> None:
        if stage is Stage.JUDGING:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        assess(given(), curves, Settings(draws=200), rng=np.random.default_rng(1), progress=stop)


def test_inputs_are_never_changed() -> None:
    x, y, errors = X.copy(), noisy(), np.full(X.size, 0.1)
    before = x.tobytes(), y.tobytes(), errors.tobytes()
    run(validated_data(x, y, errors=errors), [curve("true", spectrum(X))])
    assert (x.tobytes(), y.tobytes(), errors.tobytes()) == before


def test_a_log_axis_asks_for_positive_x() -> None:
    with pytest.raises(InputRefused) as refusal:
        validated_data(np.linspace(0.0, 1.0, 20), np.ones(20), errors=np.ones(20), axis=Axis.LOG)
    assert (refusal.value.field, refusal.value.index) == ("x", 0)


def test_more_draws_than_a_worker_can_hold_are_refused() -> None:
    x = np.linspace(0, 1, 2000)
    data = validated_data(x, x, errors=np.ones(2000))
    with pytest.raises(InputRefused, match="at most 12500 draws"):
        assess(data, [], Settings(full=True, draws=20_000), rng=np.random.default_rng(1))
