"""An assessment, and a stand-in for the computation."""

from collections.abc import Callable
from typing import Any

import pytest

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments import pipeline
from fits.assessments.models import Assessment
from fits.assessments.pipeline import Outcome
from fits.assessments.services import request_assessment

SETTINGS = {
    "levels": [0.67, 0.9, 0.95, 0.99],
    "resolution": None,
    "feature_width": None,
    "full": False,
    "shrinkage": "monotone",
    "draws": 2000,
}
Progress = Callable[[str, float], None]
Compute = Callable[[Assessment, Progress], Outcome]


def outcome_of(assessment: Assessment) -> Outcome:
    """A made-up outcome in which each curve is inside."""
    curves = list(assessment.curves.order_by("pk"))
    found: list[dict[str, Any]] = [
        {
            "name": str(curve),
            "rank": rank,
            "distance": 0.3 * rank,
            "entry_level": {"published": 0.4, "calibrated": 0.5},
            "p_value": 0.6,
            "scales": {"p_value": 0.7},
            "inside": {"exact": {"0.95": True}},
        }
        for rank, curve in enumerate(curves, start=1)
    ]
    keys = {str(curve): curve.pk for curve in curves}
    return Outcome(result={"curves": found}, detail={"data": {}}, curve_keys=keys)


@pytest.fixture
def queued(member: User, release: Release, curve: Curve) -> Assessment:
    """An assessment that waits for a worker."""
    return request_assessment(user=member, release=release, curves=[curve], settings=SETTINGS, seed=1)


@pytest.fixture
def compute_as(monkeypatch: pytest.MonkeyPatch) -> Callable[[Compute], None]:
    """Puts another computation in the place of the engine's."""

    def replace(compute: Compute) -> None:
        monkeypatch.setattr(pipeline, "compute", compute)

    return replace


@pytest.fixture
def computed(compute_as: Callable[[Compute], None]) -> list[int]:
    """The keys of the assessments that were computed, by a stand-in that succeeds."""
    keys: list[int] = []

    def compute(assessment: Assessment, progress: Progress) -> Outcome:
        keys.append(assessment.pk)
        return outcome_of(assessment)

    compute_as(compute)
    return keys
