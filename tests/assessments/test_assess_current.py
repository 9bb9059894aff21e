"""Assessments that nobody asks for: when a release is published, and when a sealed measurement opens."""

from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np
import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.utils import timezone

from core.errors import UserError
from core.measurements import services
from core.measurements.models import Measurement, Release
from core.people.models import LogEntry, Membership, Role, User
from core.theories.models import Curve, Theory
from fits.assessments import tasks
from fits.assessments.default_settings import DEFAULT_SEED, default_settings
from fits.assessments.models import Assessment
from fits.assessments.services import assess_current, cancel_assessment, request_assessment
from fits.assessments.services import request as asking
from tests.assessments.conftest import SETTINGS
from tests.conftest import npy, power
from tests.meanwhile import meanwhile
from tests.measurements.sealing import DAY, drafted, pass_time, seal, soon

WIDE, SHORT = (0.5, 12.0), (2.0, 12.0)


def curve_of(
    measurement: Measurement,
    by: User,
    name: str = "Flat floor",
    *,
    x: tuple[float, float] = WIDE,
    desk: User | None = None,
) -> Curve:
    """The next version of a theory's curve, submitted."""
    theory, _ = Theory.objects.get_or_create(
        collaboration=measurement.collaboration, name=name, desk=desk, defaults={"submitted_by": by}
    )
    grid = np.linspace(*x, 50)
    return Curve.objects.create(
        theory=theory,
        measurement=measurement,
        version=theory.curves.count() + 1,
        state=Curve.State.SUBMITTED,
        table=npy(np.column_stack([grid, power(grid)])),
        file_name="curve.csv",
        file_sha256=f"{theory.pk:032d}{theory.curves.count():032d}",
        points=grid.size,
        x_min=x[0],
        x_max=x[1],
        submitted_by=by,
        submitted_at=timezone.now(),
    )


@pytest.fixture
def student(measurement: Measurement) -> User:
    user = User.objects.create_user("student@merrow.example", name="Stu Student")
    Membership.objects.create(user=user, collaboration=measurement.collaboration, role=Role.STUDENT)
    return user


def publish(measurement: Measurement, user: User) -> Release:
    return services.publish_release(drafted(measurement, user), user)


def test_publishing_has_the_newest_version_of_each_theory_assessed(
    measurement: Measurement, lead: User, member: User
) -> None:
    curve_of(measurement, member)
    newest = [curve_of(measurement, member), curve_of(measurement, member, "Parabolic floor")]
    release = publish(measurement, lead)
    made = Assessment.objects.get()
    assert set(made.curves.all()) == set(newest)
    assert (made.release, made.is_automatic, made.requested_by, made.desk) == (release, True, lead, None)


def test_each_desk_gets_an_assessment_of_its_own(
    measurement: Measurement, lead: User, member: User, student: User
) -> None:
    shared, own = curve_of(measurement, member), curve_of(measurement, student, desk=student)
    publish(measurement, lead)
    found = {made.desk: list(made.curves.all()) for made in Assessment.objects.all()}
    assert found == {None: [shared], student: [own]}


def test_settings_and_seed_are_those_of_the_newest_assessment_at_the_desk(
    measurement: Measurement, lead: User, member: User, student: User
) -> None:
    curve, own = curve_of(measurement, member), curve_of(measurement, student, desk=student)
    release = publish(measurement, lead)
    ask = partial(request_assessment, user=member, release=release)
    ask(curves=[curve], settings=SETTINGS | {"draws": 500}, seed=7)
    ask(curves=[own], settings=SETTINGS | {"draws": 600}, seed=8)
    unwanted = ask(curves=[curve], settings=SETTINGS | {"draws": 700}, seed=9)
    cancel_assessment(unwanted, by=member)
    second = publish(measurement, lead)
    found = Assessment.objects.filter(release=second).order_by("desk__pk")
    assert {made.desk: (made.settings["draws"], made.seed) for made in found} == {
        None: (500, 7),
        student: (600, 8),
    }


def test_who_tries_settings_on_one_curve_does_not_choose_them_for_the_next_release(
    measurement: Measurement, lead: User, member: User
) -> None:
    curve = curve_of(measurement, member)
    curve_of(measurement, member, "Parabolic floor")
    release = publish(measurement, lead)
    ask = partial(request_assessment, user=member, release=release, settings=SETTINGS | {"draws": 500})
    ask(curves=[curve], seed=7)
    made = Assessment.objects.get(release=publish(measurement, lead))
    assert (made.settings, made.seed) == (default_settings(), DEFAULT_SEED)


def test_a_curve_that_falls_short_of_the_data_is_left_out_and_named(
    measurement: Measurement, lead: User, member: User, signed_in: Callable[[User], Client]
) -> None:
    judged, short = curve_of(measurement, member), curve_of(measurement, member, "Short floor", x=SHORT)
    publish(measurement, lead)
    made = Assessment.objects.get()
    assert (list(made.curves.all()), made.left_out) == ([judged], [short])
    entry = LogEntry.objects.get(deed="began_assessment")
    assert entry.who is None
    assert "Short floor, version 1" in str(entry.detail)
    words = signed_in(member).get(made.get_absolute_url()).content.decode()
    assert "does not reach over" in words
    assert "Short floor, version 1 (2 to 12)" in words


def test_nothing_is_started_where_no_curve_reaches(
    measurement: Measurement, lead: User, member: User
) -> None:
    curve_of(measurement, member, x=SHORT)
    publish(measurement, lead)
    assert not Assessment.objects.exists()


def test_nothing_is_started_while_it_is_sealed_and_all_of_it_on_opening(
    measurement: Measurement, lead: User, member: User
) -> None:
    seal(measurement, lead)
    curve_of(measurement, member)
    first, second = publish(measurement, lead), publish(measurement, lead)
    assert not Assessment.objects.exists()
    services.withdraw_release(user=lead, release=second, reason="A wrong gauge.")
    services.open_measurement(user=lead, measurement=measurement)
    made = Assessment.objects.get()
    assert (made.release, made.requested_by, made.is_automatic) == (first, lead, True)


def test_an_opening_at_its_time_starts_them_once_for_who_published(
    measurement: Measurement, lead: User, member: User
) -> None:
    seal(measurement, lead, opens_at=soon(days=1))
    curve_of(measurement, member)
    publish(measurement, lead)
    tasks.note_openings()
    assert not Assessment.objects.exists()
    pass_time(measurement, opens_at=timezone.now() - DAY)
    for _ in range(2):
        tasks.note_openings()
    assert Assessment.objects.get().requested_by == lead
    assert LogEntry.objects.filter(deed="began_assessment").count() == 1


def test_an_early_assessment_of_the_same_is_not_computed_again(
    measurement: Measurement, lead: User, member: User
) -> None:
    seal(measurement, lead)
    curve = curve_of(measurement, member)
    release = publish(measurement, lead)
    early = request_assessment(user=lead, release=release, curves=[curve], settings=SETTINGS, seed=3)
    services.open_measurement(user=lead, measurement=measurement)
    assert list(Assessment.objects.all()) == [early]


def test_an_assessment_that_is_just_being_cancelled_keeps_nothing_sealed(
    measurement: Measurement, lead: User, member: User
) -> None:
    seal(measurement, lead)
    curve = curve_of(measurement, member)
    release = publish(measurement, lead)
    early = request_assessment(user=lead, release=release, curves=[curve], settings=SETTINGS, seed=3)
    Assessment.objects.filter(pk=early.pk).update(status=Assessment.Status.RUNNING, cancel_requested=True)
    services.open_measurement(user=lead, measurement=measurement)
    assert not Measurement.objects.get().is_sealed


def test_as_many_queries_for_many_curves_as_for_few(
    measurement: Measurement, lead: User, member: User
) -> None:
    def queries() -> int:
        with CaptureQueriesContext(
            connection,
        ) as made:
            assess_current(measurement, by=lead)
        return len(made)

    curve_of(measurement, member)
    publish(measurement, lead)
    curve_of(measurement, member, "Parabolic floor")
    few = queries()
    for number in range(5):
        curve_of(measurement, member, f"Floor {number}")
    assert queries() == few


def test_curves_that_came_since_are_judged_on_the_release_that_is_the_newest_after_a_withdrawal(
    measurement: Measurement, lead: User, member: User
) -> None:
    curves = [curve_of(measurement, member)]
    first = publish(measurement, lead)
    curves.append(curve_of(measurement, member, "Parabolic floor"))
    second = publish(measurement, lead)
    withdraw = partial(services.withdraw_release, user=lead, reason="A wrong gauge.")
    withdraw(release=second)
    newest = Assessment.objects.filter(release=first).order_by("-pk")
    assert [set(made.curves.all()) for made in newest] == [set(curves), {curves[0]}]
    withdraw(release=first)
    assert Assessment.objects.count() == 3


def test_a_withdrawal_has_nothing_judged_again_where_no_curve_came_since(
    measurement: Measurement, lead: User, member: User
) -> None:
    curve_of(measurement, member)
    old, newest = publish(measurement, lead), publish(measurement, lead)
    for release in (newest, old):
        services.withdraw_release(user=lead, release=release, reason="A wrong gauge.")
    assert Assessment.objects.count() == 2


@pytest.mark.django_db(transaction=True)
def test_nothing_is_assessed_that_is_being_withdrawn(
    release: Release, curve: Curve, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    withdraw = partial(
        services.withdraw_release, user=lead, release=Release.objects.get(), reason="A wrong gauge."
    )
    ask: dict[str, Any] = {"user": lead, "release": release, "curves": [curve], "settings": SETTINGS}
    with meanwhile(monkeypatch, asking, "fingerprint", withdraw), pytest.raises(UserError) as refusal:
        request_assessment(**ask, seed=1)
    assert refusal.value.code == "release-withdrawn"
    assert not Assessment.objects.exists()


@pytest.mark.django_db(transaction=True)
def test_what_was_asked_for_first_stays_beside_a_withdrawal(
    release: Release, curve: Curve, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    withdraw = partial(
        services.withdraw_release, user=lead, release=Release.objects.get(), reason="A wrong gauge."
    )
    with meanwhile(monkeypatch, asking, "record_deed", withdraw) as refusals:
        made = request_assessment(user=lead, release=release, curves=[curve], settings=SETTINGS, seed=1)
    assert refusals == []
    assert Release.objects.get().is_withdrawn
    assert Assessment.objects.get() == made
