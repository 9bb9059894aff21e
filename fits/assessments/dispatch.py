"""Hand jobs to the workers. By name, so that whoever asks for work need not import what does it."""

import logging

import redis
from kombu.exceptions import OperationalError

from core.worker import app
from fits.assessments.job import Job

logger = logging.getLogger(__name__)

# Workers take what has the smaller number first.
SOON, LATER = 0, 9


def enqueue(jobs: type[Job], pk: int) -> bool:
    """Hand a job to the workers. False where the broker is away: the sweeper tries again."""
    priority = SOON if jobs.IS_URGENT else LATER
    try:
        app.send_task(jobs.TASK, args=[pk], priority=priority, retry=False)
    except (OperationalError, redis.RedisError, OSError) as error:
        logger.warning("%s %s waits for the sweeper, the broker is away: %s", jobs.TASK, pk, error)
        return False
    return True
