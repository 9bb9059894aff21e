"""What a search has found, as one document, and the document of the command."""

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from django.core.management import call_command

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.context import context_of
from fits.assessments.features import features_of, newest_search
from fits.assessments.features_document import contract_of
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch
from fits.assessments.services import cancel_features, request_assessment, request_features
from fits.engine.features import find
from tests.assessments.searching import COARSE, clear_release, clear_table, finished, run_all, run_plan

Output = pytest.CaptureFixture[str]


@pytest.fixture
def queued(member: User, release: Release, curve: Curve) -> Assessment:
    """An assessment of data that demand two peaks."""
    return request_assessment(
        user=member, release=clear_release(release), curves=[curve], settings=COARSE, seed=1
    )


@pytest.fixture(autouse=True)
def small_maps(monkeypatch: pytest.MonkeyPatch) -> None:
    """Maps take most of the time."""
    monkeypatch.setattr(find, "MAP_COLUMNS", 6)
    monkeypatch.setattr(find, "MAP_ROWS", 4)


@pytest.fixture
def search(queued: Assessment) -> FeatureSearch:
    """The assessment's own features, all found."""
    found = finished(queued).feature_searches.get()
    run_all(found)
    return found


@pytest.fixture
def features(search: FeatureSearch) -> dict[str, Any]:
    found = features_of(search)
    assert found is not None
    return found


def command(capsys: Output, tmp_path: Path, *options: str) -> dict[str, Any]:
    """What the command says of the same release."""
    path = tmp_path / "data.csv"
    np.savetxt(path, clear_table(), delimiter=",", header="x,y,error", comments="", fmt="%.17g")
    call_command("features", str(path), *options, "--resolution=14", "--draws=400", "--seed=1", "--json=-")
    document: dict[str, Any] = json.loads(capsys.readouterr().out)
    return document


def _found(assessment: Assessment, user: User, windows: list[tuple[float, float]]) -> FeatureSearch:
    search = request_features(user=user, assessment=assessment, windows=windows)
    run_all(search)
    return search


def test_the_contract_is_what_the_command_writes_for_the_same_data(
    features: dict[str, Any], capsys: Output, tmp_path: Path
) -> None:
    assert contract_of(features) == command(capsys, tmp_path)


def test_the_contract_holds_for_given_windows(
    search: FeatureSearch, member: User, capsys: Output, tmp_path: Path
) -> None:
    found = features_of(_found(search.assessment, member, [(0.9, 2.1), (2.4, 3.6)]))
    assert found is not None
    assert found["windows_given"]
    assert contract_of(found) == command(capsys, tmp_path, "--windows=0.9:2.1,2.4:3.6")


def test_the_document_can_be_frozen_as_json(features: dict[str, Any]) -> None:
    assert json.loads(json.dumps(features, allow_nan=False)) == features


def test_a_peak_has_its_map_and_what_samples_reach(features: dict[str, Any]) -> None:
    peak = features["peaks"][0]
    assert (len(peak["map"]["x"]), len(peak["map"]["height"])) == (6, 4)
    assert (len(peak["map"]["price"]), len(peak["map"]["price"][0])) == (4, 6)
    assert peak["map"]["exact_below"] > features["radii"][-1]["calibrated"]
    samples = peak["samples"]
    assert (samples["level"], samples["count"], len(samples["tops"])) == (0.95, 50_000, 400)
    assert samples["exact"] == peak["height"]["0.95"]
    assert samples["exact"][0] < samples["sampled"][0] < samples["sampled"][1] < samples["exact"][1]
    assert 0.0 < samples["share"] < 1.0


def test_dips_have_their_place_below_the_peaks_around_them(features: dict[str, Any]) -> None:
    dip = features["dips"][1]
    assert features["peaks"][0]["location"]["0.67"][0][1] < dip["location"]["0.67"][0][0]
    assert dip["height"]["0.95"][1] < features["peaks"][0]["height"]["0.95"][0]
    assert dip["samples"]["exact"][0] < dip["samples"]["sampled"][0]


def test_the_count_comes_with_witnesses(features: dict[str, Any]) -> None:
    for entry in [*features["count"], *features["dip_count"]]:
        witness = entry["witness"]
        assert witness is None or len(witness["x"]) == len(witness["y"]) == 201
    assert features["count_thinning"] == 0.0


def test_two_peaks_have_no_spacing(features: dict[str, Any]) -> None:
    assert (features["spacing"], features["harmonic"]) == (None, None)
    assert features["complete"]


def test_the_true_curves_peaks_are_inside_at_95_percent(features: dict[str, Any]) -> None:
    (theory,) = features["theories"]
    assert theory["name"] == "Parabolic floor"
    near = [peak for peak in theory["peaks"] if peak["window"]]
    assert [round(peak["x"], 1) for peak in near] == [1.5, 3.0]
    assert all(peak["inside"]["0.95"] for peak in near)
    assert all(dip["window"] is None or dip["inside"]["0.95"] for dip in theory["dips"])


def test_a_theorys_peak_outside_every_window_is_listed_without_one(
    search: FeatureSearch, member: User
) -> None:
    found = features_of(_found(search.assessment, member, [(2.4, 3.6)]))
    assert found is not None
    first, second = found["theories"][0]["peaks"]
    assert (first["window"], first["inside"]) == (None, None)
    assert second["inside"]["0.95"] is True


def test_before_its_end_a_search_tells_how_far_it_is(queued: Assessment) -> None:
    search = finished(queued).feature_searches.get()
    found = features_of(search)
    assert found is not None
    assert (found["complete"], found["parts_done"], found["parts"], found["peaks"]) == (False, 0, 1, [])
    run_plan(search)
    found = features_of(search)
    assert found is not None
    assert (found["complete"], found["parts_done"], found["parts"]) == (False, 1, 11)
    assert found["theories"][0]["peaks"][0]["inside"] is None


def test_a_failed_part_is_named(search: FeatureSearch) -> None:
    part, *others = search.parts.filter(kind="peak")
    FeaturePart.objects.filter(pk=part.pk).update(
        status="failed", failure_code="took-too-long", failure="It took too long", result=None
    )
    found = features_of(search)
    assert found is not None
    assert len(found["peaks"]) == len(others)
    assert found["failures"] == [
        {"kind": "peak", "window": part.window, "code": "took-too-long", "message": "It took too long"}
    ]


def test_the_samples_of_all_windows_are_the_same_curves(search: FeatureSearch, member: User) -> None:
    """Otherwise the place of one peak could not be set against that of another."""
    tops = []
    for windows in ([(0.9, 2.1), (2.4, 3.6)], [(2.4, 3.6)]):
        found = features_of(_found(search.assessment, member, windows))
        assert found is not None
        tops.append(found["peaks"][-1]["samples"]["tops"])
    assert tops[0] == tops[1]


def test_a_renamed_theory_keeps_the_name_it_was_judged_under(queued: Assessment, curve: Curve) -> None:
    done = finished(queued)
    assert done.result is not None
    judged_as = done.result["curves"][0]["name"]
    curve.theory.name = "Sloping floor"
    curve.theory.save()
    search = done.feature_searches.get()
    run_plan(search)
    found = features_of(search)
    assert found is not None
    assert [theory["name"] for theory in found["theories"]] == [judged_as]
    origin = context_of(done)["curves"][0]
    assert (origin["name"], origin["theory"]) == (judged_as, "Sloping floor")


def test_no_search_has_no_document() -> None:
    assert features_of(None) is None


def test_the_newest_search_that_was_not_cancelled_is_shown(search: FeatureSearch, member: User) -> None:
    assessment = search.assessment
    newer = request_features(user=member, assessment=assessment, windows=[(1.0, 2.0)])
    assert newest_search(assessment) == newer
    cancel_features(newer, by=newer.requested_by)
    assert newest_search(assessment) == search


@pytest.mark.parametrize("resolution", [4, 20])
def test_extreme_resolutions_end_well(member: User, release: Release, curve: Curve, resolution: int) -> None:
    settings = COARSE | {"resolution": resolution, "levels": [0.5]}
    asked = request_assessment(user=member, release=release, curves=[curve], settings=settings, seed=1)
    search = finished(asked).feature_searches.get()
    run_all(search)
    assert search.status == FeatureSearch.Status.DONE, features_of(search)
    json.dumps(features_of(search), allow_nan=False)
