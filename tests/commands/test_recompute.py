from typing import Any

import pytest
from django.core.management import CommandError, call_command

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.models import Assessment
from fits.assessments.tasks import run_assessment
from fits.engine import VERSION
from tests.assessments.searching import run_all

Output = pytest.CaptureFixture[str]
SETTINGS: dict[str, Any] = {
    "levels": [0.67, 0.95],
    "resolution": 12,
    "feature_width": None,
    "full": False,
    "shrinkage": "monotone",
    "draws": 200,
}


@pytest.fixture
def done(release: Release, curve: Curve, lead: User) -> Assessment:
    assessment = Assessment.objects.create(
        release=release, settings=SETTINGS, seed=5, fingerprint="f", requested_by=lead
    )
    assessment.curves.add(curve)
    run_assessment(assessment.pk)
    assessment.refresh_from_db()
    assert assessment.status == Assessment.Status.DONE, assessment.failure
    return assessment


def test_an_assessment_is_the_same_to_the_bit_when_computed_again(done: Assessment, capsys: Output) -> None:
    call_command("recompute", str(done.pk))
    assert f"assessment {done.pk}: the same to the bit" in capsys.readouterr().out


def test_a_number_that_was_tampered_with_is_found(done: Assessment, capsys: Output) -> None:
    assert done.result is not None
    distance = done.result["curves"][0]["distance"]
    done.result["curves"][0]["distance"] = distance * (1 + 1e-15)
    done.save(update_fields=["result"])
    with pytest.raises(SystemExit) as end:
        call_command("recompute", str(done.pk))
    assert end.value.code == 1
    assert (
        f"result.curves[0].distance: {distance * (1 + 1e-15)!r} became {distance!r}"
        in capsys.readouterr().out
    )


def test_features_are_the_same_to_the_bit_too(done: Assessment, capsys: Output) -> None:
    search = done.feature_searches.get()
    run_all(search)
    call_command("recompute", str(done.pk))
    assert f"assessment {done.pk}: the same to the bit" in capsys.readouterr().out
    count = search.parts.get(kind="count")
    assert count.result is not None
    count.result["thinning"] = 0.5
    count.save(update_fields=["result"])
    with pytest.raises(SystemExit):
        call_command("recompute", str(done.pk))
    assert f"features.search {search.pk}.count 1.thinning: 0.5 became 0.0" in capsys.readouterr().out


def test_a_theory_may_have_been_renamed_since(done: Assessment, curve: Curve, capsys: Output) -> None:
    curve.theory.name = "Sloping floor"
    curve.theory.save()
    run_all(done.feature_searches.get())
    call_command("recompute", str(done.pk))
    assert f"assessment {done.pk}: the same to the bit" in capsys.readouterr().out


def test_another_engine_version_is_told(done: Assessment, capsys: Output) -> None:
    Assessment.objects.filter(pk=done.pk).update(engine_version="0.9")
    call_command("recompute", str(done.pk))
    assert f"computed by engine 0.9, this is {VERSION}" in capsys.readouterr().out


@pytest.mark.django_db
def test_an_assessment_that_is_not_there_is_said_to_be_missing() -> None:
    with pytest.raises(CommandError, match="no finished assessment 999"):
        call_command("recompute", "999")
