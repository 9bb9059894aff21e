"""Who computes a job: conditional updates of its row, so that no two workers ever do.

A lease holds while its heartbeat is young. Each one raises the attempt, and everything that a worker writes
afterwards names its attempt, so that a worker which was taken for lost cannot overwrite what its successor does.

The heartbeat is written between batches, not by a thread: a batch takes seconds at most, the lease minutes, and a
thread would go on beating for a computation that hangs.
"""

import time
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any, Generic, TypeVar

from django.conf import settings
from django.db import transaction
from django.db.models import F, Q, QuerySet
from django.utils import timezone

from core import alive
from fits.assessments.job import Job

SECONDS_BETWEEN_WRITES = 1.0
AnyJob = TypeVar("AnyJob", bound=Job)


class Cancelled(Exception):
    """Someone asked for this job to be cancelled."""


class Superseded(Exception):
    """Another worker has taken this job over, or it has ended otherwise."""


@dataclass(frozen=True)
class Lease(Generic[AnyJob]):
    """One worker's attempt at one job."""

    jobs: type[AnyJob]
    pk: int
    attempt: int

    def row(self) -> QuerySet[AnyJob]:
        """The row as long as this attempt holds it."""
        rows: QuerySet[AnyJob] = self.jobs._default_manager.filter(
            pk=self.pk, attempt=self.attempt, status=Job.Status.RUNNING
        )
        return rows

    def write(self, **fields: Any) -> None:
        """Update the row. Raises Cancelled or Superseded where that is no longer wanted."""
        if not self.row().filter(cancel_requested=False).update(**fields):
            raise Cancelled if self.row().filter(cancel_requested=True).exists() else Superseded

    def finish(self, **fields: Any) -> None:
        """End the job as done, with what was computed. Raises like `write`."""
        done = Job.Status.DONE
        self.write(status=done, ended_at=timezone.now(), **self.jobs.AT_THE_END, **fields)


class Heartbeat:
    """Says that the work goes on, at most once a second; ends that of a lost lease."""

    def __init__(self, lease: Lease[Any]) -> None:
        self.lease = lease
        self.next_write = 0.0

    def __call__(self, **fields: Any) -> None:
        """Write the moment, and where the computation is. Raises Cancelled or Superseded."""
        if time.monotonic() < self.next_write:
            return
        self.next_write = time.monotonic() + SECONDS_BETWEEN_WRITES
        self.lease.write(heartbeat_at=timezone.now(), **fields)
        alive.touch()


def ended() -> Q:
    """Rows that are running but whose heartbeat stopped."""
    return Q(status=Job.Status.RUNNING, heartbeat_at__lt=_start())


def _start() -> datetime:
    return timezone.now() - timedelta(seconds=settings.ASSESSMENT_LEASE_SECONDS)


def take(jobs: type[AnyJob], pk: int, **fields: Any) -> Lease[AnyJob] | None:
    """Take a job if it waits or its worker is lost; None if it is not to be computed now."""
    now = timezone.now()
    free = jobs._default_manager.filter(
        Q(status=Job.Status.QUEUED) | ended(),
        pk=pk,
        cancel_requested=False,
        attempt__lt=settings.ASSESSMENT_MAX_ATTEMPTS,
    )
    with transaction.atomic():
        taken = free.update(
            status=Job.Status.RUNNING, attempt=F("attempt") + 1, started_at=now, heartbeat_at=now, **fields
        )
        if not taken:
            return None
        return Lease(jobs, pk, jobs._default_manager.values_list("attempt", flat=True).get(pk=pk))


def end(rows: QuerySet[AnyJob], status: str, *, code: str = "", sentence: str = "") -> int:
    """End those of the rows that this finds as given, without a result; returns how many."""
    return rows.update(
        status=status,
        ended_at=timezone.now(),
        failure_code=code,
        failure=sentence,
        **rows.model.AT_THE_END,
    )
