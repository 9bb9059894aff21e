"""Assessments that nobody works at: those whose message was lost and those whose worker was."""

from datetime import timedelta

from django.conf import settings
from django.db.models import Q
from django.utils import timezone

from fits.assessments import claims
from fits.assessments.models import Assessment

Status = Assessment.Status

LOST_WORKER = (
    "Its worker was lost {attempts} times, most likely for want of memory. Choose a coarser resolution"
)


def end_lost() -> None:
    """End those whose worker was lost and that are not to be tried again."""
    lost = Assessment.objects.filter(claims.lease_ended())
    claims.end(lost.filter(cancel_requested=True), Status.CANCELLED)
    attempts = settings.ASSESSMENT_MAX_ATTEMPTS
    claims.end(
        lost.filter(attempt__gte=attempts),
        Status.FAILED,
        code="lost-worker",
        sentence=LOST_WORKER.format(attempts=attempts),
    )


def forgotten() -> list[int]:
    """Those to be enqueued: nobody picked them up, or their worker was lost and they may be tried again.

    A queued row's heartbeat is when it was last enqueued again, so that messages do not pile up behind a
    long queue.
    """
    now = timezone.now()
    waiting = Q(
        status=Status.QUEUED,
        heartbeat_at=None,
        created_at__lt=now - timedelta(seconds=settings.ASSESSMENT_PICK_UP_SECONDS),
    )
    waiting_again = Q(
        status=Status.QUEUED, heartbeat_at__lt=now - timedelta(seconds=settings.ASSESSMENT_LEASE_SECONDS)
    )
    rows = Assessment.objects.filter(waiting | waiting_again | claims.lease_ended())
    return list(rows.order_by("pk").values_list("pk", flat=True))


def note_enqueued(pk: int) -> None:
    """Remember that a waiting assessment has been enqueued again."""
    Assessment.objects.filter(pk=pk, status=Status.QUEUED).update(heartbeat_at=timezone.now())
