"""Assessments under lease: taken by a worker, followed on the page, saved with their verdicts."""

from typing import Any

from django.db import transaction

from fits.assessments import leases
from fits.assessments.leases import Lease
from fits.assessments.models import Assessment, Verdict
from fits.assessments.pipeline import Outcome
from fits.engine import VERSION

Stage = Assessment.Stage


def claim(pk: int) -> Lease[Assessment] | None:
    """Take the assessment if it waits or its worker is lost; None if it is not to be computed now."""
    return leases.take(Assessment, pk, stage=Stage.READING, progress=0.0)


class Heartbeat:
    """Takes the engine's progress to the row."""

    def __init__(self, lease: Lease[Assessment]) -> None:
        self.beat = leases.Heartbeat(lease)

    def __call__(self, stage: str, progress: float) -> None:
        """Write where the computation is. Raises Cancelled or Superseded."""
        self.beat(stage=Stage(stage), progress=min(max(progress, 0.0), 1.0))


def finish(lease: Lease[Assessment], outcome: Outcome) -> None:
    """Save what was computed. Raises Cancelled or Superseded where that is no longer wanted."""
    with transaction.atomic():
        lease.finish(
            progress=1.0,
            result=outcome.result,
            detail=outcome.detail,
            radius=outcome.radius,
            separations=outcome.separations,
            engine_version=VERSION,
        )
        Verdict.objects.bulk_create(
            _verdict(lease.pk, outcome.curve_keys[found["name"]], found) for found in outcome.result["curves"]
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
