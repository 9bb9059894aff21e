"""What an assessment keeps beside its result, for pages that ask many assessments for it."""

from importlib import import_module
from typing import Any

import pytest
from django.apps import apps

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve, Theory
from fits.assessments import pipeline
from fits.assessments.models import Assessment
from fits.assessments.services import request_assessment
from fits.assessments.tasks import run_assessment
from tests.assessments.conftest import SETTINGS


@pytest.fixture
def rival(curve: Curve) -> Curve:
    """A second theory's curve: the same table, as far as the rows go."""
    theory = Theory.objects.create(
        collaboration=curve.theory.collaboration, name="Flat floor", submitted_by=curve.submitted_by
    )
    return Curve.objects.create(
        theory=theory,
        measurement=curve.measurement,
        version=1,
        state=Curve.State.SUBMITTED,
        table=curve.table,
        file_name="flat.csv",
        file_sha256="0" * 64,
        points=curve.points,
        x_min=curve.x_min,
        x_max=curve.x_max,
        submitted_by=curve.submitted_by,
    )


def computed(user: User, release: Release, curves: list[Curve], **settings: Any) -> Assessment:
    chosen = SETTINGS | {"draws": 100} | settings
    assessment = request_assessment(user=user, release=release, curves=curves, settings=chosen, seed=1)
    run_assessment(assessment.pk)
    assessment.refresh_from_db()
    assert assessment.status == Assessment.Status.DONE
    return assessment


@pytest.mark.parametrize("kind", ["calibrated", "cautious"])
def test_the_radius_at_95_is_kept_of_the_kind_that_was_chosen(
    member: User, release: Release, curve: Curve, kind: str
) -> None:
    assessment = computed(member, release, [curve], radius=kind)
    assert assessment.result is not None
    radii = {radius["level"]: radius for radius in assessment.result["radii"]}
    assert assessment.radius == radii[0.95][kind]


def test_without_that_level_there_is_no_radius(member: User, release: Release, curve: Curve) -> None:
    assert computed(member, release, [curve], levels=[0.9]).radius is None


def test_the_distance_of_each_pair_is_kept_by_the_keys_of_the_curves(
    member: User, release: Release, curve: Curve, rival: Curve
) -> None:
    assert computed(member, release, [rival, curve]).separations == {
        "curves": [curve.pk, rival.pk],
        "distances": [0.0],
    }


def test_of_too_many_curves_no_pairs_are_kept(
    monkeypatch: pytest.MonkeyPatch, member: User, release: Release, curve: Curve, rival: Curve
) -> None:
    monkeypatch.setattr(pipeline, "MOST_CURVES", 1)
    assert computed(member, release, [rival, curve]).separations is None


def test_older_assessments_get_their_radius_from_their_results(
    member: User, release: Release, curve: Curve
) -> None:
    migration = import_module("fits.assessments.migrations.0004_fill_radius")
    cautious = computed(member, release, [curve], radius="cautious")
    without_choice = computed(member, release, [curve])
    without_level = computed(member, release, [curve], levels=[0.9])
    kept = [cautious.radius, without_choice.radius, None]
    Assessment.objects.update(radius=None)
    migration.fill(apps, None)
    rows = [cautious, without_choice, without_level]
    for row in rows:
        row.refresh_from_db()
    assert [row.radius for row in rows] == kept
