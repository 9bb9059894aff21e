"""Asking for an assessment and cancelling it."""

from collections.abc import Callable

import pytest
from django.db import IntegrityError
from pytest_django import DjangoCaptureOnCommitCallbacks

from core.errors import UserError
from core.measurements.models import Release
from core.people.models import LogEntry, User
from core.theories.models import Curve
from fits.assessments import claims
from fits.assessments.dispatch import enqueue
from fits.assessments.fingerprint import fingerprint
from fits.assessments.models import Assessment
from fits.assessments.services import cancel_assessment, request, request_assessment
from tests.assessments.conftest import SETTINGS

Status = Assessment.Status


@pytest.fixture
def ask(member: User, release: Release, curve: Curve) -> Callable[..., Assessment]:
    def asking(seed: int = 1, **changed: object) -> Assessment:
        settings = SETTINGS | changed
        return request_assessment(user=member, release=release, curves=[curve], settings=settings, seed=seed)

    return asking


def test_a_new_assessment_waits_with_its_inputs(ask: Callable[..., Assessment], curve: Curve) -> None:
    assessment = ask(seed=7)
    assert (assessment.status, assessment.stage, assessment.seed) == (Status.QUEUED, "waiting", 7)
    assert list(assessment.curves.all()) == [curve]
    assert len(assessment.fingerprint) == 64


def test_the_task_is_sent_when_the_row_is_committed(
    ask: Callable[..., Assessment],
    monkeypatch: pytest.MonkeyPatch,
    django_capture_on_commit_callbacks: DjangoCaptureOnCommitCallbacks,
) -> None:
    sent: list[int] = []
    monkeypatch.setattr(request, "enqueue", lambda jobs, pk: sent.append(pk))
    with django_capture_on_commit_callbacks(execute=True):
        assessment = ask()
        assert sent == []
    assert sent == [assessment.pk]


@pytest.mark.parametrize("status", [Status.QUEUED, Status.RUNNING, Status.DONE])
def test_the_same_inputs_are_not_computed_twice(ask: Callable[..., Assessment], status: str) -> None:
    first = ask()
    Assessment.objects.filter(pk=first.pk).update(status=status)
    assert ask() == first


@pytest.mark.parametrize("status", [Status.FAILED, Status.CANCELLED])
def test_what_failed_or_was_cancelled_may_be_asked_for_again(
    ask: Callable[..., Assessment], status: str
) -> None:
    first = ask()
    Assessment.objects.filter(pk=first.pk).update(status=status)
    assert ask() != first


def test_another_seed_or_setting_is_another_assessment(ask: Callable[..., Assessment]) -> None:
    assert len({ask().pk, ask(seed=2).pk, ask(draws=3000).pk}) == 3


def test_of_two_who_ask_at_the_same_moment_the_second_gets_the_first_ones(
    ask: Callable[..., Assessment], monkeypatch: pytest.MonkeyPatch
) -> None:
    first = ask(features=False)
    looks = iter([None, first])
    monkeypatch.setattr(request, "_same", lambda mark: next(looks))
    assert ask(features=True) == first
    first = Assessment.objects.get()
    assert first.settings["features"] is True


def test_the_database_itself_refuses_a_second_one(queued: Assessment) -> None:
    queued.pk = None
    with pytest.raises(IntegrityError):
        queued.save(force_insert=True)


def test_the_fingerprint_does_not_hang_on_the_order_of_curves(release: Release, curve: Curve) -> None:
    other = Curve(pk=curve.pk + 1, file_sha256="0" * 64)
    there = fingerprint(release=release, curves=[curve, other], settings=SETTINGS, seed=1)
    back = fingerprint(release=release, curves=[other, curve], settings=SETTINGS, seed=1)
    assert there == back


def test_a_broker_that_is_away_does_not_stop_the_page(
    ask: Callable[..., Assessment],
    monkeypatch: pytest.MonkeyPatch,
    django_capture_on_commit_callbacks: DjangoCaptureOnCommitCallbacks,
) -> None:
    # No Redis runs in the home of the tests but while a test with a worker does.
    sent: list[bool] = []
    monkeypatch.setattr(request, "enqueue", lambda jobs, pk: sent.append(enqueue(jobs, pk)))
    with django_capture_on_commit_callbacks(execute=True):
        assessment = ask()
    assessment.refresh_from_db()
    assert (sent, assessment.status) == ([False], Status.QUEUED)


def test_a_draft_release_is_refused(member: User, release: Release, curve: Curve) -> None:
    release.state = Release.State.DRAFT
    with pytest.raises(UserError) as refused:
        request_assessment(user=member, release=release, curves=[curve], settings=SETTINGS, seed=1)
    assert refused.value.code == "release-not-published"


def test_a_draft_curve_is_refused(member: User, release: Release, curve: Curve) -> None:
    curve.state = Curve.State.DRAFT
    with pytest.raises(UserError) as refused:
        request_assessment(user=member, release=release, curves=[curve], settings=SETTINGS, seed=1)
    assert refused.value.code == "curve-not-submitted"


def test_no_curve_at_all_is_refused(member: User, release: Release) -> None:
    with pytest.raises(UserError) as refused:
        request_assessment(user=member, release=release, curves=[], settings=SETTINGS, seed=1)
    assert refused.value.code == "no-curves"


def test_what_waits_is_cancelled_at_once(queued: Assessment) -> None:
    cancel_assessment(queued, by=queued.requested_by)
    assert queued.status == Status.CANCELLED
    assert queued.ended_at is not None


def test_what_runs_is_asked_to_end(queued: Assessment) -> None:
    claims.claim(queued.pk)
    cancel_assessment(queued, by=queued.requested_by)
    assert (queued.status, queued.cancel_requested) == (Status.RUNNING, True)


def test_what_is_done_stays_done(queued: Assessment) -> None:
    Assessment.objects.filter(pk=queued.pk).update(status=Status.DONE)
    cancel_assessment(queued, by=queued.requested_by)
    assert (queued.status, queued.cancel_requested) == (Status.DONE, False)


def test_what_is_about_to_be_cancelled_is_not_given_to_who_asks_again(
    ask: Callable[..., Assessment], member: User
) -> None:
    first = ask()
    claims.claim(first.pk)
    cancel_assessment(first, by=member)
    with pytest.raises(UserError) as refused:
        ask()
    assert refused.value.code == "being-cancelled"
    # Its worker has looked.
    Assessment.objects.filter(pk=first.pk).update(status=Status.CANCELLED)
    assert ask() != first


def test_the_log_tells_once_who_asked_and_who_cancelled(
    ask: Callable[..., Assessment], member: User, lead: User
) -> None:
    assessment = ask()
    ask()
    for _ in range(2):
        cancel_assessment(assessment, by=lead)
    asked, cancelled = LogEntry.objects.order_by("pk")
    assert [(entry.deed, entry.who) for entry in (asked, cancelled)] == [
        ("asked_assessment", member),
        ("cancelled_assessment", lead),
    ]
    assert {entry.hidden_with for entry in (asked, cancelled)} == {assessment.release.measurement}
    assert asked.detail["curves"] == ["Parabolic floor, version 1"]


def test_an_automatic_one_is_nobodys_deed(member: User, release: Release, curve: Curve) -> None:
    request_assessment(
        user=member, release=release, curves=[curve], settings=SETTINGS, seed=1, is_automatic=True
    )
    entry = LogEntry.objects.get(deed="began_assessment")
    assert (entry.who, "release 1" in entry.about) == (None, True)
