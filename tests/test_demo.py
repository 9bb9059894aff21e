"""The made-up scenario tells the story that it is there for."""

from collections.abc import Iterable, Iterator

import pytest
from django.db import transaction
from django.test import Client
from pytest_django import DjangoDbBlocker

from core.measurements.models import Measurement, Release
from core.measurements.services import open_measurement
from core.people.models import Collaboration, User
from core.theories.models import Curve
from fits.assessments.models import Assessment, Verdict
from fits.assessments.tasks import run_assessment
from fits.management.demo import load
from fits.management.demo.accounts import FIRST_BENCH, LEAD, MEMBER, SECOND_BENCH, TEACHER, Account, user_of

pytestmark = [pytest.mark.django_db, pytest.mark.usefixtures("loaded")]

SURFACE, CURRENT, WINTER = "Surface seiche power", "Current in the narrows", "Surface seiche power under ice"


def done(assessments: Iterable[Assessment]) -> list[Assessment]:
    found = list(assessments)
    for assessment in found:
        run_assessment(assessment.pk)
        assessment.refresh_from_db()
        assert assessment.status == Assessment.Status.DONE, assessment.failure
    return found


@pytest.fixture(scope="module")
def loaded(django_db_setup: None, django_db_blocker: DjangoDbBlocker) -> Iterator[list[Assessment]]:
    """The demo's assessments, loaded once; each test works in a savepoint of its own."""
    with django_db_blocker.unblock(), transaction.atomic():
        yield load.load()
        transaction.set_rollback(True)


def on(measurement: str) -> list[Assessment]:
    """The demo's assessments of a measurement, by release."""
    assessments = Assessment.objects.select_related("release__measurement").order_by("release__number")
    return [found for found in assessments if found.release.measurement.name == measurement]


@pytest.fixture
def survey(loaded: list[Assessment]) -> list[Assessment]:
    """The assessments of the lake's three releases, done."""
    return done(on(SURFACE))


def verdict(assessment: Assessment, theory: str) -> Verdict:
    return assessment.verdicts.get(curve__theory__name=theory)


def inside(assessment: Assessment) -> set[str]:
    """The theories in the 95 % exact set."""
    return {str(found.curve.theory) for found in assessment.verdicts.all() if found.inside["0.95"]}


def page(account: Account, address: str) -> str:
    client = Client()
    client.force_login(user_of(account))
    answer = client.get(address)
    assert answer.status_code == 200
    return " ".join(answer.content.decode().split())


def test_the_first_release_cannot_tell_theories_apart_that_the_third_can(survey: list[Assessment]) -> None:
    first, _, third = survey
    assert {"Parabolic floor", "Triangular floor"} <= inside(first)
    assert inside(third) == {"Parabolic floor"}


def test_later_releases_are_assessed_when_they_are_published(survey: list[Assessment]) -> None:
    assert [found.is_automatic for found in survey] == [False, True, True]
    assert [found.verdicts.count() for found in survey] == [4, 4, 4]


def test_the_flat_floor_is_pushed_outward_release_by_release(survey: list[Assessment]) -> None:
    pushed = []
    for assessment in survey:
        assert assessment.radius is not None
        pushed.append(verdict(assessment, "Flat floor").distance / assessment.radius)
    assert pushed == sorted(pushed)
    assert not verdict(survey[2], "Flat floor").inside["0.99"]


def test_the_page_says_at_which_release_the_flat_floor_left(survey: list[Assessment]) -> None:
    left = next(
        number for number, assessment in enumerate(survey, start=1) if "Flat floor" not in inside(assessment)
    )
    assert left == 2
    said = page(MEMBER, survey[0].release.measurement.get_absolute_url())
    assert "moved outside at release 2" in said


def test_one_release_of_the_current_leaves_open_what_the_surface_settles(survey: list[Assessment]) -> None:
    (current,) = done(on(CURRENT))
    assert {"Parabolic floor", "Triangular floor"} <= inside(current)


def test_the_winter_is_sealed_and_shows_what_it_says_once_the_lead_opens_it() -> None:
    winter = Measurement.objects.get(name=WINTER)
    assert winter.is_sealed
    assert not on(WINTER)
    assert "release 1" not in page(MEMBER, winter.get_absolute_url())
    open_measurement(user=user_of(LEAD), measurement=winter)
    (assessment,) = done(on(WINTER))
    assert inside(assessment) == {"Parabolic floor"}
    assert "release 1" in page(MEMBER, winter.get_absolute_url())


def test_the_class_sees_two_resonances(loaded: list[Assessment]) -> None:
    assessment, *desks = done(
        found for found in loaded if found.release.measurement.collaboration.name == "Wave tank class"
    )
    assert assessment.requested_by == user_of(TEACHER)
    assert verdict(assessment, "Two resonances").rank == 1
    assert verdict(assessment, "Two resonances").inside["0.95"]
    # The ball alone admits one resonance; its steady misfit shows scale by scale.
    assert verdict(assessment, "One resonance").scale_p_value < 0.05
    assert [found.desk for found in desks] == [user_of(FIRST_BENCH), user_of(SECOND_BENCH)]


def test_loading_twice_doubles_nothing(loaded: list[Assessment]) -> None:
    kinds = (User, Collaboration, Measurement, Release, Curve, Assessment)
    counts = [kind.objects.count() for kind in kinds]
    assert load.load() == loaded
    assert [kind.objects.count() for kind in kinds] == counts == [6, 2, 4, 6, 15, 7]


def test_each_start_has_passwords_of_its_own() -> None:
    first, second = load.fresh_passwords(), load.fresh_passwords()
    assert set(first.values()).isdisjoint(second.values())
    for account, password in second.items():
        assert User.objects.get(email=account.email).check_password(password)
