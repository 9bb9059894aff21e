"""The register of a sealed measurement: who submitted which curve when, and who had seen the data."""

from collections.abc import Callable
from datetime import datetime, timedelta
from functools import partial

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse
from django.utils import timezone

from core.measurements import services
from core.measurements.models import EarlyLook, Measurement, Release
from core.people.models import Membership, Role, User
from core.theories.curve_page import curve_page
from core.theories.models import Curve, Theory
from core.theories.register import register_page
from core.theories.services import submit as submitting
from core.theories.services import submit_curve
from tests.meanwhile import meanwhile
from tests.measurements.sealing import change, pass_time, seal, soon

SignedIn = Callable[[User], Client]


def again(curve: Curve, at: datetime | None, by: User | None = None) -> Curve:
    """Another version of a curve, submitted at a moment; a draft without one."""
    kept = Curve.objects.get(pk=curve.pk)
    kept.pk, kept._state.adding = None, True
    kept.version = None if at is None else curve.theory.curves.exclude(version=None).count() + 1
    kept.state = Curve.State.DRAFT if at is None else Curve.State.SUBMITTED
    kept.submitted_at, kept.submitted_by = at, by or curve.submitted_by
    kept.save()
    return kept


def test_each_curve_stands_beside_deadline_and_opening(
    measurement: Measurement, curve: Curve, lead: User
) -> None:
    seal(measurement, lead)
    sealed, hour = timezone.now(), timedelta(hours=1)
    pass_time(
        measurement,
        sealed_at=sealed,
        curves_until=sealed + 2 * hour,
        opens_at=sealed + 4 * hour,
        opened_at=sealed + 4 * hour,
    )
    Curve.objects.filter(pk=curve.pk).update(submitted_at=sealed - hour)
    for hours in (1, 3, 5):
        again(curve, sealed + hours * hour)
    assert [line.came for line in register_page(measurement, lead).curves] == [
        "before it was sealed",
        "before the data were open",
        "after the deadline",
        "after the data were open",
    ]


def test_a_curve_of_somebody_who_had_seen_the_data_says_so(
    measurement: Measurement, curve: Curve, lead: User, member: User
) -> None:
    seal(measurement, lead)
    before = again(curve, timezone.now(), by=lead)
    services.look_early(user=lead, measurement=measurement)
    after = again(curve, timezone.now(), by=lead)
    had_looked = {line.curve.pk: line.had_looked for line in register_page(measurement, member).curves}
    assert had_looked == {curve.pk: False, before.pk: False, after.pk: True}


def test_everybody_reads_the_seal_the_looks_and_the_curves_with_their_hashes(
    measurement: Measurement, curve: Curve, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    address = reverse("theories:register", args=[measurement.pk])
    assert signed_in(member).get(address).status_code == 404
    seal(measurement, lead, announced_x_min=0.5, announced_x_max=4.5)
    services.look_early(user=lead, measurement=measurement)
    words = signed_in(member).get(address).content.decode()
    for expected in (curve.file_sha256, "Lin Lead looked at the data", "0.5 to 4.5 cycles per hour"):
        assert expected in words
    table = signed_in(member).get(reverse("theories:register_csv", args=[measurement.pk])).content.decode()
    assert curve.file_sha256 in table
    assert table.startswith("theory,version,submitted by")
    assert signed_in(stranger).get(address).status_code == 404


def test_a_student_reads_of_their_own_curves_alone(
    measurement: Measurement, curve: Curve, lead: User, signed_in: SignedIn
) -> None:
    student = User.objects.create_user("student@merrow.example", name="Stu Student")
    Membership.objects.create(user=student, collaboration=measurement.collaboration, role=Role.STUDENT)
    desk = Theory.objects.create(
        collaboration=measurement.collaboration, name="My floor", desk=student, submitted_by=student
    )
    own = again(curve, timezone.now(), by=student)
    Curve.objects.filter(pk=own.pk).update(theory=desk)
    seal(measurement, lead)
    assert [line.curve.pk for line in register_page(measurement, student).curves] == [own.pk]
    assert len(register_page(measurement, lead).curves) == 2


def test_as_many_queries_for_many_curves_as_for_few(
    measurement: Measurement, curve: Curve, lead: User, member: User, signed_in: SignedIn
) -> None:
    seal(measurement, lead)
    client, address = signed_in(member), reverse("theories:register", args=[measurement.pk])

    def queries() -> int:
        with CaptureQueriesContext(connection) as made:
            assert client.get(address).status_code == 200
        return len(made)

    few = queries()
    for number in range(5):
        again(curve, timezone.now())
        looker = User.objects.create_user(f"{number}@merrow.example")
        EarlyLook.objects.create(measurement=measurement, user=looker)
    assert queries() == few


def test_a_curve_is_drawn_without_data_that_are_sealed(
    measurement: Measurement, release: Release, curve: Curve, lead: User, member: User
) -> None:
    assert curve_page(curve, member).figure.data is not None
    Release.objects.filter(pk=release.pk).update(state="draft", number=None)
    seal(measurement, lead, announced_x_min=0.5, announced_x_max=9.0)
    Release.objects.filter(pk=release.pk).update(state="published", number=1)
    EarlyLook.objects.all().delete()
    page = curve_page(Curve.objects.get(pk=curve.pk), member)
    assert page.figure.data is None
    assert page.release is None
    assert "the announced stretch 0.5–9: missing stretch 4.6–9" in page.doubts[0]
    services.look_early(user=lead, measurement=measurement)
    assert curve_page(Curve.objects.get(pk=curve.pk), lead).figure.data is not None


@pytest.mark.django_db(transaction=True)
def test_a_curve_is_submitted_before_a_deadline_or_not_at_all(
    measurement: Measurement, curve: Curve, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    seal(measurement, lead, curves_until=soon(days=2))
    late = again(curve, None)
    # The deadline is moved to the front of it while it waits for its turn.
    pass_time(measurement, curves_until=timezone.now())
    with pytest.raises(Exception, match="were taken until"):
        submit_curve(late)
    pass_time(measurement, curves_until=soon(days=2))
    other = partial(change, Measurement.objects.get(), lead, curves_until=soon(days=1))
    with meanwhile(monkeypatch, submitting, "record_submission", other) as refusals:
        submit_curve(late)
    assert refusals == []
    kept, taken = Measurement.objects.get(), Curve.objects.get(pk=late.pk)
    assert kept.curves_until is not None
    assert taken.submitted_at is not None
    assert taken.submitted_at < kept.curves_until
