"""The made-up scenario tells the story that it is there for."""

from collections.abc import Iterable

import pytest

from core.measurements.models import Release
from core.people.models import Collaboration, User
from core.theories.models import Curve
from fits.assessments.models import Assessment, Verdict
from fits.assessments.tasks import run_assessment
from fits.management.demo import load

pytestmark = pytest.mark.django_db


@pytest.fixture
def survey() -> list[Assessment]:
    """The assessments of the lake's three releases, done."""
    return done(assessment for assessment in load.load() if assessment.requested_by.email == load.LEAD.email)


def done(assessments: Iterable[Assessment]) -> list[Assessment]:
    found = list(assessments)
    for assessment in found:
        run_assessment(assessment.pk)
        assessment.refresh_from_db()
        assert assessment.status == Assessment.Status.DONE, assessment.failure
    return found


def verdict(assessment: Assessment, theory: str) -> Verdict:
    return assessment.verdicts.get(curve__theory__name=theory)


def inside(assessment: Assessment) -> set[str]:
    """The theories in the 95 % exact set."""
    return {str(found.curve.theory) for found in assessment.verdicts.all() if found.inside["0.95"]}


def test_the_first_release_cannot_tell_theories_apart_that_the_third_can(survey: list[Assessment]) -> None:
    first, _, third = survey
    assert {"Parabolic floor", "Triangular floor"} <= inside(first)
    assert inside(third) == {"Parabolic floor"}


def test_the_flat_floor_is_pushed_outward_release_by_release(survey: list[Assessment]) -> None:
    distances = [verdict(assessment, "Flat floor").distance for assessment in survey]
    assert distances == sorted(distances)
    assert not verdict(survey[2], "Flat floor").inside["0.99"]


def test_the_class_sees_two_resonances() -> None:
    (assessment,) = done(
        assessment for assessment in load.load() if assessment.requested_by.email == load.TEACHER.email
    )
    assert verdict(assessment, "Two resonances").rank == 1
    assert verdict(assessment, "Two resonances").inside["0.95"]
    # The ball alone admits one resonance; its steady misfit shows scale by scale.
    assert verdict(assessment, "One resonance").scale_p_value < 0.05


def test_loading_twice_doubles_nothing() -> None:
    first = load.load()
    kinds = (User, Collaboration, Release, Curve, Assessment)
    counts = [kind.objects.count() for kind in kinds]
    assert load.load() == first
    assert [kind.objects.count() for kind in kinds] == counts == [4, 2, 4, 6, 4]


def test_each_start_has_passwords_of_its_own() -> None:
    load.load()
    first, second = load.fresh_passwords(), load.fresh_passwords()
    assert set(first.values()).isdisjoint(second.values())
    for account, password in second.items():
        assert User.objects.get(email=account.email).check_password(password)
