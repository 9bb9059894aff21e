"""Settings are fixed on the form before anything is computed."""

from typing import Any

from core.measurements.models import Release
from core.theories.models import Curve
from fits.assessments.forms import AssessmentForm, submitted_curves


def asked(release: Release, curve: Curve, **changes: Any) -> AssessmentForm:
    data = {
        "curves": [curve.pk],
        "levels": "67, 90, 95, 99",
        "resolution_choice": "default",
        "shrinkage": "monotone",
        "radius": "calibrated",
        "draws": "2000",
        "features": "on",
        "seed": "7",
    }
    return AssessmentForm(data | changes, release=release, curves=submitted_curves(release))


def test_the_defaults_are_those_of_the_engine(release: Release, curve: Curve) -> None:
    form = asked(release, curve)
    assert form.is_valid(), form.errors
    assert form.chosen_settings() == {
        "levels": [0.67, 0.9, 0.95, 0.99],
        "resolution": None,
        "feature_width": None,
        "full": False,
        "shrinkage": "monotone",
        "radius": "calibrated",
        "draws": 2000,
        "features": True,
    }


def test_the_newest_version_is_chosen_and_older_ones_offered(release: Release, curve: Curve) -> None:
    fields = (
        "theory",
        "measurement",
        "table",
        "file_name",
        "file_sha256",
        "points",
        "x_min",
        "x_max",
        "submitted_by",
    )
    values = {field: getattr(curve, field) for field in fields}
    newer = Curve.objects.create(version=2, state=Curve.State.SUBMITTED, **values)
    Curve.objects.create(state=Curve.State.DRAFT, **values)
    field: Any = AssessmentForm(release=release, curves=submitted_curves(release)).fields["curves"]
    assert field.initial == [newer.pk]
    assert set(field.queryset) == {curve, newer}


def test_levels_are_percentages(release: Release, curve: Curve) -> None:
    form = asked(release, curve, levels="95 68.3%")
    assert form.is_valid(), form.errors
    assert form.chosen_settings()["levels"] == [0.683, 0.95]
    for wrong in ("", "abc", "0, 95", "100", "nan"):
        assert "levels" in asked(release, curve, levels=wrong).errors


def test_a_chosen_resolution_needs_its_number(release: Release, curve: Curve) -> None:
    assert "resolution" in asked(release, curve, resolution_choice="number").errors
    assert "feature_width" in asked(release, curve, resolution_choice="width").errors
    assert "feature_width" in asked(release, curve, resolution_choice="width", feature_width="-1").errors
    form = asked(release, curve, resolution_choice="width", feature_width="0.4", resolution="12")
    assert form.is_valid(), form.errors
    assert form.chosen_settings()["feature_width"] == 0.4
    assert form.chosen_settings()["resolution"] is None


def test_full_resolution_is_refused_for_many_points(release: Release, curve: Curve) -> None:
    release.points = 3001
    assert "resolution_choice" in asked(release, curve, resolution_choice="full").errors


def test_a_seed_is_proposed(release: Release) -> None:
    assert AssessmentForm(release=release, curves=submitted_curves(release)).fields["seed"].initial >= 0


def test_a_curve_whose_key_no_database_holds_is_no_choice(release: Release, curve: Curve) -> None:
    assert "curves" in asked(release, curve, curves=[str(2**70)]).errors


def test_a_number_that_no_key_has_is_no_choice(release: Release, curve: Curve) -> None:
    for key in ("9" * 30, "9" * 5000):
        assert "curves" in asked(release, curve, curves=[key]).errors
