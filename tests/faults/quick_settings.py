"""Settings of a site that misses a lost worker or message after seconds instead of minutes."""

from tests.settings import *  # noqa: F403

ASSESSMENT_PICK_UP_SECONDS = 1
ASSESSMENT_LEASE_SECONDS = 3
CELERY_BEAT_SCHEDULE = {"sweep": {"task": "fits.assessments.tasks.sweep", "schedule": 1.0}}
