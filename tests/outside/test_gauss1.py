"""NIST StRD Gauss1: fit, radii and verdicts on a published dataset (source: see nist.py).

The expected numbers were computed independently of this project's code, with J = 40 and errors 2.5.
"""

import json
from pathlib import Path

import numpy as np
import pytest
from django.core.management import call_command

from fits.engine.assess import assess
from fits.engine.data import validated_curve, validated_data
from fits.engine.features.find import count_peaks, feature_case, find_peak, windows_of
from fits.engine.result import Result
from fits.engine.settings import Settings
from tests.outside.nist import STANDARD_ERROR, gauss1

CERTIFIED, WITHOUT_SECOND, TOO_LOW = range(3)


@pytest.fixture(scope="module")
def result() -> Result:
    nist = gauss1()
    heights = {"certified": 1.0, "without second": 0.0, "3 % too low": 0.97}
    return assess(
        validated_data(nist.x, nist.y, errors=np.full(nist.x.size, STANDARD_ERROR)),
        [validated_curve(name, nist.x, nist.curve(second_height=height)) for name, height in heights.items()],
        Settings(resolution=40),
        rng=np.random.default_rng(1),
    )


def test_the_file_is_read_as_nist_certifies_it() -> None:
    nist = gauss1()
    residuals = nist.y - nist.curve()
    # Certified residual sum of squares, in the file's header.
    assert residuals @ residuals == pytest.approx(1.3158222432e03, rel=1e-9)


def test_the_fit_has_the_known_size_and_risk(result: Result) -> None:
    shrunk = result.fit.shrunk
    assert shrunk.effective_parameters == pytest.approx(16.176, abs=5e-4)
    assert shrunk.risk == pytest.approx(0.02501, abs=5e-6)
    assert shrunk.tau == pytest.approx(0.03527, abs=5e-6)


def test_the_published_radii_are_the_known_ones(result: Result) -> None:
    assert [radius.published for radius in result.ball.radii] == pytest.approx(
        [0.2013, 0.2650, 0.2881, 0.3272], abs=5e-5
    )


def test_the_leftover_is_the_known_chi_square(result: Result) -> None:
    assert result.fit.leftover is not None
    assert result.fit.leftover.chi2 == pytest.approx(178.67, abs=5e-3)
    assert result.fit.leftover.dof == 210


def test_the_distances_of_the_three_curves_are_the_known_ones(result: Result) -> None:
    distances = [verdict.distance for verdict in result.verdicts]
    assert distances == pytest.approx([0.30416, 8.744, 0.3986], abs=5e-4)


def test_the_calibrated_radius_is_wider_than_the_published_one(result: Result) -> None:
    assert result.ball.radii[2].calibrated == pytest.approx(0.310, abs=0.008)


def test_the_published_ball_rejects_the_certified_curve_at_95(result: Result) -> None:
    certified = result.verdicts[CERTIFIED]
    assert certified.published_entry_level == pytest.approx(0.972, abs=5e-4)
    assert certified.distance > result.ball.radii[2].published


def test_the_exact_and_calibrated_verdicts_keep_the_certified_curve(result: Result) -> None:
    certified = result.verdicts[CERTIFIED]
    assert certified.p_value.value == pytest.approx(0.09, abs=0.02)
    assert certified.p_value.value > 0.05
    assert certified.distance <= result.ball.radii[2].calibrated


def test_the_scale_set_keeps_the_certified_curve(result: Result) -> None:
    scales = result.verdicts[CERTIFIED].scales
    assert scales.p_value == pytest.approx(0.46, abs=0.02)
    assert scales.functions[scales.worst] == 4


def test_a_second_peak_three_percent_too_low_is_rejected(result: Result) -> None:
    low = result.verdicts[TOO_LOW]
    assert low.p_value.value == pytest.approx(0.002, abs=0.002)
    assert low.scales.p_value == pytest.approx(0.004, abs=0.001)
    assert low.scales.functions[low.scales.worst] == 6


def test_the_curves_are_ranked_as_they_fit(result: Result) -> None:
    assert result.ranking.order == (CERTIFIED, TOO_LOW, WITHOUT_SECOND)


def test_the_command_judges_the_same(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    nist = gauss1()
    errors = np.full(nist.x.size, STANDARD_ERROR)
    np.savetxt(
        tmp_path / "gauss1.csv", np.column_stack([nist.x, nist.y, errors]), delimiter=",", header="x,y,error"
    )
    heights = {"certified": 1.0, "without": 0.0, "low": 0.97}
    for name, height in heights.items():
        curve = np.column_stack([nist.x, nist.curve(second_height=height)])
        np.savetxt(tmp_path / f"{name}.csv", curve, delimiter=",")
    curves = [str(tmp_path / f"{name}.csv") for name in heights]
    call_command("rank", str(tmp_path / "gauss1.csv"), *curves, "--resolution=40", "--json=-")
    document = json.loads(capsys.readouterr().out)
    assert [curve["name"] for curve in document["curves"]] == ["certified", "low", "without"]
    assert [curve["inside"]["exact"]["0.95"] for curve in document["curves"]] == [True, False, False]
    assert document["curves"][0]["inside"]["published"]["0.95"] is False
    assert document["curves"][0]["inside"]["calibrated"]["0.95"] is True


def test_the_data_demand_two_peaks_where_the_certified_curve_has_them(result: Result) -> None:
    """Price 5.29 of at most one peak: an independent computation. Certified maxima 66.10 and 178.62."""
    case = feature_case(result)
    count = count_peaks(case)
    assert count.at_most[1].lower == pytest.approx(5.29, abs=0.005)
    assert count.at_most[1].lower > result.ball.radii[-1].calibrated
    assert count.at_most[-1].peaks == 2
    for window, certified, near in zip(
        windows_of(case, [(40.0, 100.0), (150.0, 210.0)]),
        (66.10, 178.62),
        ((63, 69), (175, 181)),
        strict=True,
    ):
        (stretch,) = find_peak(case, window, with_map=False).location[2]
        assert stretch.low <= certified <= stretch.high
        assert (stretch.low, stretch.high) == pytest.approx(near, abs=1.1)
