"""What workers do. Each task may be delivered twice, late or never; none of that does harm."""

import contextlib
import logging
from collections.abc import Iterator
from typing import Any

from celery.exceptions import SoftTimeLimitExceeded
from django.apps import apps
from django.db import transaction

from core import alive
from core.errors import UserError, record_fault
from core.measurements import services
from core.worker import app
from fits.assessments import claims, feature_parts, leases, pipeline, searches, sweeper
from fits.assessments.dispatch import enqueue
from fits.assessments.job import Job
from fits.assessments.leases import Lease
from fits.assessments.models import Assessment, FeaturePart
from fits.assessments.services.find_features import find_own_features, wants_features
from fits.engine.refusal import InputRefused

logger = logging.getLogger(__name__)

TOOK_TOO_LONG = "It took longer than it may. Choose a coarser resolution or fewer draws"


@app.task(name="fits.assessments.tasks.run_assessment")  # type: ignore[untyped-decorator]
def run_assessment(pk: int) -> None:
    """Compute an assessment, unless it has ended or a living worker has it."""
    lease = claims.claim(pk)
    if lease is None:
        return
    with ending(lease, f"computing assessment {pk}"):
        assessment = Assessment.objects.get(pk=pk)
        outcome = pipeline.compute(assessment, claims.Heartbeat(lease))
        with transaction.atomic():
            claims.finish(lease, outcome)
            # Whether features are wanted may have been said while it was computed.
            assessment.refresh_from_db(fields=["settings"])
            if wants_features(assessment.settings):
                find_own_features(assessment.requested_by, assessment)
    alive.touch()


@app.task(name="fits.assessments.tasks.run_feature_part")  # type: ignore[untyped-decorator]
def run_feature_part(pk: int) -> None:
    """Compute one part of a search for features, unless it has ended or a living worker has it."""
    lease = leases.take(FeaturePart, pk)
    if lease is None:
        return
    parts = FeaturePart.objects.select_related("search__assessment__release__measurement")
    part = parts.defer("search__assessment__result", "search__assessment__detail").get(pk=pk)
    with ending(lease, f"computing part {pk}, {part}"):
        result = feature_parts.compute(part, leases.Heartbeat(lease))
        searches.finish(lease, part, result)
    searches.settle(pk=part.search_id)
    alive.touch()


@contextlib.contextmanager
def ending(lease: Lease[Any], doing: str) -> Iterator[None]:
    """See to it that the job ends, whatever its computation raises."""
    try:
        yield
    except leases.Cancelled:
        leases.end(lease.row(), Job.Status.CANCELLED)
    except leases.Superseded:
        logger.warning("%s: attempt %s was superseded", doing, lease.attempt)
    except SoftTimeLimitExceeded:
        _fail(lease, "took-too-long", TOOK_TOO_LONG)
    except (UserError, InputRefused) as error:
        _fail(lease, error.code, str(error))
    except Exception as error:
        fault_id = record_fault(error, doing)
        _fail(lease, "fault", f"A fault of ours, logged as {fault_id}. It is not caused by your data")


def _fail(lease: Lease[Any], code: str, sentence: str) -> None:
    leases.end(lease.row(), Job.Status.FAILED, code=code, sentence=sentence)


@app.task(name="fits.assessments.tasks.sweep")  # type: ignore[untyped-decorator]
def sweep() -> None:
    """See to it that every job ends."""
    for jobs in (model for model in apps.get_models() if issubclass(model, Job)):
        sweeper.end_lost(jobs)
        for pk in sweeper.forgotten(jobs):
            if enqueue(jobs, pk):
                sweeper.note_enqueued(jobs, pk)
    searches.settle()
    alive.touch()


@app.task(name="fits.assessments.tasks.note_openings")  # type: ignore[untyped-decorator]
def note_openings() -> None:
    """Write down which measurements have opened at their time, and assess their curves."""
    services.note_openings()
    alive.touch()


@app.task(name="fits.assessments.tasks.canary")  # type: ignore[untyped-decorator]
def canary() -> None:
    """Sing: a worker that hangs does not."""
    alive.touch()
