"""A Celery application whose assessments go on until the file that GATE names is there, and whose searches for
features until that of PART_GATE is."""

# ruff: noqa: E402 - Django must be set up before models are imported
import os
import time
from pathlib import Path

os.environ["DJANGO_SETTINGS_MODULE"] = "tests.faults.quick_settings"

import django

django.setup()

from core.worker import app
from fits.assessments import feature_parts, pipeline
from fits.assessments.models import Assessment, FeaturePart
from fits.engine.features.programme import Look
from tests.assessments.conftest import Progress, outcome_of

__all__ = ["app"]


def compute(assessment: Assessment, progress: Progress) -> pipeline.Outcome:
    """A long computation that looks up between its batches, as the engine does."""
    while not Path(os.environ["GATE"]).exists():
        progress("judging", 0.5)
        time.sleep(0.05)
    return outcome_of(assessment)


def compute_part(part: FeaturePart, look: Look) -> object:
    """As long; the plan names one peak."""
    while not Path(os.environ.get("PART_GATE", "/")).exists():
        look()
        time.sleep(0.05)
    return {"windows": {"peak": [[1.0, 2.0]], "dip": []}, "theories": []}


pipeline.compute = compute
feature_parts.compute = compute_part
