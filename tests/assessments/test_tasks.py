"""One assessment from claim to end, whatever happens on the way."""

from collections.abc import Callable
from datetime import timedelta

import pytest
from celery.exceptions import SoftTimeLimitExceeded
from django.conf import settings
from django.db import connection
from django.utils import timezone
from pytest_django import DjangoAssertNumQueries

from core import alive
from core.errors import UserError
from core.theories.models import Curve
from fits.assessments import claims, leases
from fits.assessments.leases import Lease
from fits.assessments.models import Assessment
from fits.assessments.pipeline import Outcome
from fits.assessments.services import cancel_assessment
from fits.assessments.tasks import canary, run_assessment
from fits.engine.refusal import InputRefused
from tests.assessments.conftest import Compute, Progress, outcome_of

Status = Assessment.Status
Replace = Callable[[Compute], None]


def let_the_lease_end(assessment: Assessment) -> None:
    """As if its worker had been silent for longer than the lease."""
    silent = timezone.now() - timedelta(seconds=settings.ASSESSMENT_LEASE_SECONDS + 1)
    Assessment.objects.filter(pk=assessment.pk).update(heartbeat_at=silent)


def test_a_task_saves_result_detail_and_verdicts(
    queued: Assessment, computed: list[int], curve: Curve
) -> None:
    run_assessment(queued.pk)
    queued.refresh_from_db()
    assert (queued.status, queued.stage, queued.progress, queued.attempt) == (Status.DONE, "ended", 1.0, 1)
    assert queued.result == outcome_of(queued).result
    assert queued.detail == outcome_of(queued).detail
    assert queued.engine_version
    assert queued.ended_at is not None
    verdict = queued.verdicts.get()
    assert (verdict.curve, verdict.rank, verdict.distance) == (curve, 1, 0.3)
    assert (verdict.entry_level, verdict.p_value, verdict.scale_p_value) == (0.5, 0.6, 0.7)
    assert verdict.inside == {"0.95": True}


def test_a_second_delivery_of_a_done_one_computes_nothing(queued: Assessment, computed: list[int]) -> None:
    run_assessment(queued.pk)
    run_assessment(queued.pk)
    assert computed == [queued.pk]


def test_a_second_delivery_during_the_first_computes_nothing(queued: Assessment, compute_as: Replace) -> None:
    computations = 0

    def compute(assessment: Assessment, progress: Progress) -> Outcome:
        nonlocal computations
        computations += 1
        run_assessment(assessment.pk)
        return outcome_of(assessment)

    compute_as(compute)
    run_assessment(queued.pk)
    queued.refresh_from_db()
    assert (computations, queued.attempt, queued.status) == (1, 1, Status.DONE)


def test_a_claim_is_given_once(queued: Assessment) -> None:
    assert claims.claim(queued.pk) == Lease(Assessment, queued.pk, 1)
    assert claims.claim(queued.pk) is None


def test_an_assessment_whose_worker_was_lost_is_claimed_anew(queued: Assessment) -> None:
    claims.claim(queued.pk)
    let_the_lease_end(queued)
    assert claims.claim(queued.pk) == Lease(Assessment, queued.pk, 2)


def test_a_superseded_attempt_cannot_save(queued: Assessment, compute_as: Replace) -> None:
    def compute(assessment: Assessment, progress: Progress) -> Outcome:
        let_the_lease_end(assessment)
        claims.claim(assessment.pk)
        return outcome_of(assessment)

    compute_as(compute)
    run_assessment(queued.pk)
    queued.refresh_from_db()
    assert (queued.status, queued.attempt, queued.result) == (Status.RUNNING, 2, None)
    assert not queued.verdicts.exists()


def test_a_superseded_attempt_ends_at_its_next_progress(queued: Assessment) -> None:
    first = claims.claim(queued.pk)
    assert first is not None
    let_the_lease_end(queued)
    claims.claim(queued.pk)
    with pytest.raises(leases.Superseded):
        claims.Heartbeat(first)("fitting", 0.5)


def test_a_cancelled_one_that_is_delivered_late_is_not_computed(
    queued: Assessment, computed: list[int]
) -> None:
    cancel_assessment(queued, by=queued.requested_by)
    run_assessment(queued.pk)
    assert computed == []


def test_a_running_one_ends_cancelled_at_its_next_progress(queued: Assessment, compute_as: Replace) -> None:
    def compute(assessment: Assessment, progress: Progress) -> Outcome:
        cancel_assessment(assessment, by=assessment.requested_by)
        progress("judging", 0.5)
        return outcome_of(assessment)

    compute_as(compute)
    run_assessment(queued.pk)
    queued.refresh_from_db()
    assert (queued.status, queued.result) == (Status.CANCELLED, None)


def test_a_cancel_in_the_last_moment_still_counts(queued: Assessment, compute_as: Replace) -> None:
    def compute(assessment: Assessment, progress: Progress) -> Outcome:
        cancel_assessment(assessment, by=assessment.requested_by)
        return outcome_of(assessment)

    compute_as(compute)
    run_assessment(queued.pk)
    queued.refresh_from_db()
    assert queued.status == Status.CANCELLED


def test_progress_is_written_at_most_once_a_second(
    queued: Assessment, django_assert_num_queries: DjangoAssertNumQueries
) -> None:
    claim = claims.claim(queued.pk)
    assert claim is not None
    heartbeat = claims.Heartbeat(claim)
    with django_assert_num_queries(1):
        for step in range(100):
            heartbeat("calibrating", step / 100)


def test_progress_shows_stage_and_share(queued: Assessment) -> None:
    claim = claims.claim(queued.pk)
    assert claim is not None
    claims.Heartbeat(claim)("calibrating", 0.25)
    queued.refresh_from_db()
    assert (queued.stage, queued.progress) == ("calibrating", 0.25)


@pytest.mark.parametrize(
    ("error", "code"),
    [
        (UserError("curve-too-short", "the curve ends before the data", "Extend it"), "curve-too-short"),
        (InputRefused("covariance-singular", "covariance", "not positive definite"), "covariance-singular"),
        (SoftTimeLimitExceeded(), "took-too-long"),
    ],
)
def test_a_failure_keeps_its_code_and_a_sentence(
    queued: Assessment, compute_as: Replace, error: Exception, code: str
) -> None:
    def compute(assessment: Assessment, progress: Progress) -> Outcome:
        raise error

    compute_as(compute)
    run_assessment(queued.pk)
    queued.refresh_from_db()
    assert (queued.status, queued.failure_code) == (Status.FAILED, code)
    assert queued.failure


def test_a_fault_of_ours_shows_the_id_of_its_log_entry_and_no_more(
    queued: Assessment, compute_as: Replace, monkeypatch: pytest.MonkeyPatch
) -> None:
    def compute(assessment: Assessment, progress: Progress) -> Outcome:
        raise ZeroDivisionError("inner matters")

    compute_as(compute)
    monkeypatch.setattr("fits.assessments.tasks.record_fault", lambda error, doing: "0a1b2c3d")
    run_assessment(queued.pk)
    queued.refresh_from_db()
    assert (queued.status, queued.failure_code) == (Status.FAILED, "fault")
    assert "0a1b2c3d" in queued.failure
    assert "inner matters" not in queued.failure


@pytest.mark.django_db(transaction=True)
def test_no_transaction_is_open_during_the_computation(queued: Assessment, compute_as: Replace) -> None:
    inside: list[bool] = []

    def compute(assessment: Assessment, progress: Progress) -> Outcome:
        inside.append(connection.in_atomic_block)
        return outcome_of(assessment)

    compute_as(compute)
    run_assessment(queued.pk)
    assert inside == [False]


def test_the_canary_shows_that_the_worker_works() -> None:
    settings.WORKER_ALIVE_FILE.unlink(missing_ok=True)
    assert alive.silence() is None
    canary()
    silence = alive.silence()
    assert silence is not None
    assert silence < 5.0
