"""The engine judged by repeats whose truth is known."""

import numpy as np
import pytest

from fits.engine.assess import assess
from fits.engine.ball import is_above, is_inside
from fits.engine.coverage.cells import POINTS, Cell, ErrorKind, cells, prepared
from fits.engine.coverage.curves import TrueCurve, WrongCurve, true_curve, wrong_curve
from fits.engine.coverage.repeats import ConfidenceSet, run_cell, sets_holding, simulation_error
from fits.engine.data import ErrorSource, validated_curve, validated_data
from fits.engine.settings import Settings
from fits.engine.whitening import CorrelatedErrors

SETTINGS = Settings(draws=200)


def test_there_are_54_cells_and_six_more_with_unresolved_structure() -> None:
    found = cells()
    assert len(set(found)) == len(found) == 60
    assert sum(cell.resolved for cell in found) == len(ErrorKind) * len(POINTS) * len(TrueCurve) == 54


@pytest.mark.parametrize("errors", ErrorKind)
@pytest.mark.parametrize("seed", [1, 2, 3])
def test_a_repeat_is_judged_as_an_assessment_of_the_same_data(errors: ErrorKind, seed: int) -> None:
    setting = prepared(Cell(errors, 50, TrueCurve.THREE_PEAKS))
    observed = setting.whitened + np.random.default_rng(seed).standard_normal(50)
    held = sets_holding(setting, observed, rng=np.random.default_rng(seed), settings=SETTINGS)

    x = setting.data.x
    if errors is ErrorKind.CORRELATED:
        assert isinstance(setting.whitening, CorrelatedErrors)
        y = setting.whitening.lower @ observed
        data = validated_data(x, y, covariance=setting.data.covariance)
    elif errors is ErrorKind.ESTIMATED:
        data = validated_data(x, observed, source=ErrorSource.ESTIMATE)
    else:
        data = validated_data(x, observed, errors=np.ones(50))
    curves = [validated_curve("truth", x, true_curve(TrueCurve.THREE_PEAKS, x))]
    curves += [validated_curve(kind.value, x, wrong_curve(kind, x)) for kind in WrongCurve]
    found = assess(data, curves, SETTINGS, rng=np.random.default_rng(seed))
    expected = [
        [
            [
                is_inside(verdict.distance, squared)
                for squared in (radius.published_squared, radius.calibrated_squared, radius.cautious_squared)
            ]
            + [is_above(p, radius.level) for p in (verdict.p_value.value, verdict.scales.p_value)]
            for radius in found.ball.radii
        ]
        for verdict in found.verdicts
    ]
    assert held.transpose(0, 2, 1).tolist() == expected


def test_a_cell_repeats_bit_by_bit_and_differs_by_index_and_seed() -> None:
    def held(index: int, seed: int) -> list[object]:
        cell = Cell(ErrorKind.KNOWN, 50, TrueCurve.CHIRP)
        return list(run_cell(cell, index=index, seed=seed, repeats=40, settings=SETTINGS).held.tolist())

    assert held(3, 1) == held(3, 1)
    assert held(3, 1) != held(4, 1)
    assert held(3, 1) != held(3, 2)


def test_bigger_levels_hold_more_and_the_cautious_ball_holds_what_the_calibrated_holds() -> None:
    cell = Cell(ErrorKind.ESTIMATED, 50, TrueCurve.STEP)
    shares = run_cell(cell, index=0, seed=1, repeats=60, settings=SETTINGS).shares
    assert (np.diff(shares, axis=1) >= 0.0).all()
    place = {kind: number for number, kind in enumerate(ConfidenceSet)}
    assert (shares[place[ConfidenceSet.CAUTIOUS]] >= shares[place[ConfidenceSet.CALIBRATED]]).all()


def test_wrong_curves_of_every_size_weigh_about_the_same_at_every_number_of_points() -> None:
    for points in POINTS:
        setting = prepared(Cell(ErrorKind.KNOWN, points, TrueCurve.THREE_PEAKS))
        misfits = points * ((setting.curves[1:] - setting.curves[0]) ** 2).sum(axis=1)
        for kind, misfit in zip(WrongCurve, misfits, strict=True):
            if kind is not WrongCurve.ABSENT:
                assert misfit == pytest.approx(12.0, rel=0.2), (kind, points)


def test_a_resolved_truth_leaves_only_scatter_over_and_an_unresolved_one_more() -> None:
    for resolved, least in ((True, 0.0), (False, 5.0)):
        setting = prepared(Cell(ErrorKind.ESTIMATED, 50, TrueCurve.NARROW_PEAK, resolved=resolved))
        beta = setting.coordinates.of(setting.whitened)
        rest = setting.coordinates.residuals(setting.whitened, beta)
        assert beta == pytest.approx(setting.curves[0])
        assert rest @ rest == pytest.approx(0.0, abs=1e-20) if resolved else rest @ rest > least


def test_the_simulation_error_is_that_of_a_share() -> None:
    assert simulation_error(0.95, 1500) == pytest.approx(0.005627, rel=1e-3)
