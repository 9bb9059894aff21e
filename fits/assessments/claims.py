"""Who computes an assessment: conditional updates of its row, so that no two workers ever do.

A claim is a lease: it holds while its heartbeat is young. Each claim raises the attempt, and everything that
a worker writes afterwards names its attempt, so that a worker which was taken for lost cannot overwrite what
its successor does.

The heartbeat is written with the progress, between batches, not by a thread: a batch takes seconds at
most, the lease minutes, and a thread would go on beating for a computation that hangs.
"""

import time
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Any

from django.conf import settings
from django.db import transaction
from django.db.models import F, Q, QuerySet
from django.utils import timezone

from core import alive
from fits.assessments.models import Assessment, Verdict
from fits.assessments.pipeline import Outcome
from fits.engine import VERSION

Status = Assessment.Status
Stage = Assessment.Stage

SECONDS_BETWEEN_WRITES = 1.0


class Cancelled(Exception):
    """Someone asked for this assessment to be cancelled."""


class Superseded(Exception):
    """Another worker has taken this assessment over, or it has ended otherwise."""


@dataclass(frozen=True)
class Claim:
    """One worker's attempt at one assessment."""

    pk: int
    attempt: int

    def row(self) -> QuerySet[Assessment]:
        """The row as long as this attempt holds it."""
        return Assessment.objects.filter(pk=self.pk, attempt=self.attempt, status=Status.RUNNING)


def lease_ended() -> Q:
    """Rows that are running but whose heartbeat stopped."""
    return Q(status=Status.RUNNING, heartbeat_at__lt=_lease_start())


def _lease_start() -> datetime:
    return timezone.now() - timedelta(seconds=settings.ASSESSMENT_LEASE_SECONDS)


def claim(pk: int) -> Claim | None:
    """Take the assessment if it waits or its worker is lost; None if it is not to be computed now."""
    now = timezone.now()
    free = Assessment.objects.filter(
        Q(status=Status.QUEUED) | lease_ended(),
        pk=pk,
        cancel_requested=False,
        attempt__lt=settings.ASSESSMENT_MAX_ATTEMPTS,
    )
    with transaction.atomic():
        taken = free.update(
            status=Status.RUNNING,
            stage=Stage.READING,
            progress=0.0,
            attempt=F("attempt") + 1,
            started_at=now,
            heartbeat_at=now,
        )
        if not taken:
            return None
        return Claim(pk, Assessment.objects.values_list("attempt", flat=True).get(pk=pk))


class Heartbeat:
    """Takes the engine's progress to the row, at most once a second; ends the work of a lost claim."""

    def __init__(self, claim: Claim) -> None:
        self.claim = claim
        self.next_write = 0.0

    def __call__(self, stage: str, progress: float) -> None:
        """Write where the computation is. Raises Cancelled or Superseded."""
        if time.monotonic() < self.next_write:
            return
        self.next_write = time.monotonic() + SECONDS_BETWEEN_WRITES
        held = self.claim.row().filter(cancel_requested=False)
        written = held.update(
            stage=Stage(stage), progress=min(max(progress, 0.0), 1.0), heartbeat_at=timezone.now()
        )
        if not written:
            raise _why_lost(self.claim)
        alive.touch()


def _why_lost(claim: Claim) -> Cancelled | Superseded:
    return Cancelled() if claim.row().filter(cancel_requested=True).exists() else Superseded()


def finish(claim: Claim, outcome: Outcome) -> None:
    """Save what was computed. Raises Cancelled or Superseded where that is no longer wanted."""
    with transaction.atomic():
        held = claim.row().filter(cancel_requested=False)
        saved = held.update(
            status=Status.DONE,
            stage=Stage.ENDED,
            progress=1.0,
            ended_at=timezone.now(),
            result=outcome.result,
            detail=outcome.detail,
            engine_version=VERSION,
        )
        if not saved:
            raise _why_lost(claim)
        Verdict.objects.bulk_create(
            _verdict(claim.pk, outcome.curve_keys[found["name"]], found) for found in outcome.result["curves"]
        )


def _verdict(assessment: int, curve: int, found: dict[str, Any]) -> Verdict:
    return Verdict(
        assessment_id=assessment,
        curve_id=curve,
        rank=found["rank"],
        distance=found["distance"],
        entry_level=found["entry_level"]["calibrated"],
        p_value=found["p_value"],
        scale_p_value=found["scales"]["p_value"],
        inside=found["inside"]["exact"],
    )


def end(rows: QuerySet[Assessment], status: str, *, code: str = "", sentence: str = "") -> int:
    """End those of the rows that this finds as given, without a result; returns how many."""
    return rows.update(
        status=status, stage=Stage.ENDED, ended_at=timezone.now(), failure_code=code, failure=sentence
    )
