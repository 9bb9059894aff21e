"""What workers do. Each task may be delivered twice, late or never; none of that does harm."""

import logging

import redis
from celery.exceptions import SoftTimeLimitExceeded
from kombu.exceptions import OperationalError

from core import alive
from core.errors import UserError, record_fault
from core.worker import app
from fits.assessments import claims, pipeline, sweeper
from fits.assessments.models import Assessment
from fits.engine.refusal import InputRefused

logger = logging.getLogger(__name__)

TOOK_TOO_LONG = "It took longer than an assessment may. Choose a coarser resolution or fewer draws"


def enqueue(pk: int) -> bool:
    """Hand an assessment to the workers. False where the broker is away: the sweeper tries again."""
    try:
        run_assessment.apply_async(args=[pk], retry=False)
    except (OperationalError, redis.RedisError, OSError) as error:
        logger.warning("assessment %s waits for the sweeper, the broker is away: %s", pk, error)
        return False
    return True


@app.task(name="fits.assessments.tasks.run_assessment")  # type: ignore[untyped-decorator]
def run_assessment(pk: int) -> None:
    """Compute an assessment, unless it has ended or a living worker has it."""
    claim = claims.claim(pk)
    if claim is None:
        return
    try:
        assessment = Assessment.objects.get(pk=pk)
        outcome = pipeline.compute(assessment, claims.Heartbeat(claim))
        claims.finish(claim, outcome)
    except claims.Cancelled:
        claims.end(claim.row(), Assessment.Status.CANCELLED)
    except claims.Superseded:
        logger.warning("assessment %s: attempt %s was superseded", pk, claim.attempt)
    except SoftTimeLimitExceeded:
        _fail(claim, "took-too-long", TOOK_TOO_LONG)
    except (UserError, InputRefused) as error:
        _fail(claim, error.code, str(error))
    except Exception as error:
        fault_id = record_fault(error, f"computing assessment {pk}")
        _fail(claim, "fault", f"A fault of ours, logged as {fault_id}. It is not caused by your data")
    alive.touch()


def _fail(claim: claims.Claim, code: str, sentence: str) -> None:
    claims.end(claim.row(), Assessment.Status.FAILED, code=code, sentence=sentence)


@app.task(name="fits.assessments.tasks.sweep")  # type: ignore[untyped-decorator]
def sweep() -> None:
    """See to it that every assessment ends."""
    sweeper.end_lost()
    for pk in sweeper.forgotten():
        if enqueue(pk):
            sweeper.note_enqueued(pk)
    alive.touch()


@app.task(name="fits.assessments.tasks.canary")  # type: ignore[untyped-decorator]
def canary() -> None:
    """Sing: a worker that hangs does not."""
    alive.touch()
