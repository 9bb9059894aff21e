"""A Celery application whose assessments go on until the file that GATE names is there."""

# ruff: noqa: E402 - Django must be set up before models are imported
import os
import time
from pathlib import Path

os.environ["DJANGO_SETTINGS_MODULE"] = "tests.faults.quick_settings"

import django

django.setup()

from core.worker import app
from fits.assessments import pipeline
from fits.assessments.models import Assessment
from tests.assessments.conftest import Progress, outcome_of

__all__ = ["app"]


def compute(assessment: Assessment, progress: Progress) -> pipeline.Outcome:
    """A long computation that looks up between its batches, as the engine does."""
    while not Path(os.environ["GATE"]).exists():
        progress("judging", 0.5)
        time.sleep(0.05)
    return outcome_of(assessment)


pipeline.compute = compute
