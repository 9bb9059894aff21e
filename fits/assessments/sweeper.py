"""Jobs that nobody works at: those whose message was lost and those whose worker was."""

from datetime import timedelta

from django.conf import settings
from django.db.models import Q
from django.utils import timezone

from fits.assessments import leases
from fits.assessments.job import Job

LOST_WORKER = (
    "Its worker was lost {attempts} times, most likely for want of memory. Choose a coarser resolution"
)


def end_lost(jobs: type[Job]) -> None:
    """End those whose worker was lost and that are not to be tried again."""
    lost = jobs._default_manager.filter(leases.ended())
    leases.end(lost.filter(cancel_requested=True), Job.Status.CANCELLED)
    attempts = settings.ASSESSMENT_MAX_ATTEMPTS
    leases.end(
        lost.filter(attempt__gte=attempts),
        Job.Status.FAILED,
        code="lost-worker",
        sentence=LOST_WORKER.format(attempts=attempts),
    )


def forgotten(jobs: type[Job]) -> list[int]:
    """Those to be enqueued: nobody picked them up, or their worker was lost and they may be tried again.

    A queued row's heartbeat is when it was last enqueued again, so that messages do not pile up behind a
    long queue.
    """
    now = timezone.now()
    waiting = Q(
        status=Job.Status.QUEUED,
        heartbeat_at=None,
        created_at__lt=now - timedelta(seconds=settings.ASSESSMENT_PICK_UP_SECONDS),
    )
    waiting_again = Q(
        status=Job.Status.QUEUED, heartbeat_at__lt=now - timedelta(seconds=settings.ASSESSMENT_LEASE_SECONDS)
    )
    rows = jobs._default_manager.filter(waiting | waiting_again | leases.ended())
    return list(rows.order_by("pk").values_list("pk", flat=True))


def note_enqueued(jobs: type[Job], pk: int) -> None:
    """Remember that a waiting job has been enqueued again."""
    jobs._default_manager.filter(pk=pk, status=Job.Status.QUEUED).update(heartbeat_at=timezone.now())
