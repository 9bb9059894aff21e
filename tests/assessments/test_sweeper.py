"""Every assessment ends, even when messages and workers are lost."""

from datetime import timedelta

import pytest
from django.conf import settings
from django.utils import timezone

from fits.assessments import claims, tasks
from fits.assessments.job import Job
from fits.assessments.models import Assessment
from fits.assessments.services import cancel_assessment
from tests.assessments.test_tasks import let_the_lease_end

Status = Assessment.Status


@pytest.fixture
def sent(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """The keys of the assessments that were enqueued, with a broker that takes them."""
    keys: list[int] = []

    def enqueue(jobs: type[Job], pk: int) -> bool:
        keys.append(pk)
        return True

    monkeypatch.setattr(tasks, "enqueue", enqueue)
    return keys


def wait_for(assessment: Assessment, seconds: float) -> None:
    """As if it had been asked for so long ago."""
    asked = timezone.now() - timedelta(seconds=seconds)
    Assessment.objects.filter(pk=assessment.pk).update(created_at=asked)


def test_one_that_was_asked_for_just_now_is_left_to_its_message(queued: Assessment, sent: list[int]) -> None:
    tasks.sweep()
    assert sent == []


def test_one_that_nobody_picked_up_is_enqueued_again(queued: Assessment, sent: list[int]) -> None:
    wait_for(queued, settings.ASSESSMENT_PICK_UP_SECONDS + 1)
    tasks.sweep()
    assert sent == [queued.pk]


def test_messages_do_not_pile_up_behind_a_long_queue(queued: Assessment, sent: list[int]) -> None:
    wait_for(queued, 3600)
    tasks.sweep()
    tasks.sweep()
    assert sent == [queued.pk]
    let_the_lease_end(queued)
    tasks.sweep()
    assert sent == [queued.pk, queued.pk]


def test_while_the_broker_is_away_it_is_tried_at_each_sweep(
    queued: Assessment, monkeypatch: pytest.MonkeyPatch
) -> None:
    wait_for(queued, 3600)
    tries: list[int] = []
    monkeypatch.setattr(tasks, "enqueue", lambda jobs, pk: tries.append(pk))  # answers None: not sent
    tasks.sweep()
    tasks.sweep()
    assert tries == [queued.pk, queued.pk]


def test_one_that_a_living_worker_has_is_left_alone(queued: Assessment, sent: list[int]) -> None:
    claims.claim(queued.pk)
    tasks.sweep()
    queued.refresh_from_db()
    assert (sent, queued.status) == ([], Status.RUNNING)


def test_one_whose_worker_was_lost_is_enqueued_again(queued: Assessment, sent: list[int]) -> None:
    claims.claim(queued.pk)
    let_the_lease_end(queued)
    tasks.sweep()
    assert sent == [queued.pk]


def test_after_the_last_attempt_it_fails_with_a_reason(queued: Assessment, sent: list[int]) -> None:
    for _ in range(settings.ASSESSMENT_MAX_ATTEMPTS):
        assert claims.claim(queued.pk) is not None
        let_the_lease_end(queued)
    assert claims.claim(queued.pk) is None
    tasks.sweep()
    queued.refresh_from_db()
    assert (queued.status, queued.failure_code, sent) == (Status.FAILED, "lost-worker", [])


def test_one_that_was_to_be_cancelled_when_its_worker_was_lost_is_cancelled(
    queued: Assessment, sent: list[int]
) -> None:
    claims.claim(queued.pk)
    cancel_assessment(queued, by=queued.requested_by)
    let_the_lease_end(queued)
    tasks.sweep()
    queued.refresh_from_db()
    assert (queued.status, sent) == (Status.CANCELLED, [])
