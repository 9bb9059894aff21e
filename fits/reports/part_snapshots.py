"""What a part of a draft would show if it were frozen now."""

from fits.assessments.context import context_of
from fits.assessments.features import features_of
from fits.reports.models import ReportPart
from fits.reports.narrowed import narrowed
from fits.reports.snapshot import Snapshot


def snapshot_of(part: ReportPart) -> Snapshot:
    """The result of its assessment, without the theories that are not shown."""
    assessment = part.assessment
    assert assessment is not None
    assert assessment.result is not None
    assert assessment.detail is not None
    whole = Snapshot(assessment.result, assessment.detail, context_of(assessment), features_of(part.search))
    return narrowed(whole, part.shown)


def heading_of(part: ReportPart) -> str:
    """Its own heading, or the names of measurement and release."""
    if part.heading or part.assessment is None:
        return part.heading
    release = part.assessment.release
    return f"{release.measurement}, {release}"[:200]
