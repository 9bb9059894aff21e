"""Hand jobs to the workers. By name, so that whoever asks for work need not import what does it."""

import logging

import redis
from kombu.exceptions import OperationalError

from core.worker import app

logger = logging.getLogger(__name__)

# Workers take what has the smaller number first: features never keep verdicts waiting in the queue.
SOON, LATER = 0, 9


def enqueue(pk: int) -> bool:
    """Hand an assessment to the workers. False where the broker is away: the sweeper tries again."""
    return _send("run_assessment", pk, SOON)


def enqueue_part(pk: int) -> bool:
    """Hand a part of a search for features to the workers; False as above."""
    return _send("run_feature_part", pk, LATER)


def _send(task: str, pk: int, priority: int) -> bool:
    try:
        app.send_task(f"fits.assessments.tasks.{task}", args=[pk], priority=priority, retry=False)
    except (OperationalError, redis.RedisError, OSError) as error:
        logger.warning("%s %s waits for the sweeper, the broker is away: %s", task, pk, error)
        return False
    return True
