"""Write a report."""

from core.people.models import User
from core.user_error import UserError
from fits.assessments.context import context_of
from fits.assessments.features import features_of
from fits.assessments.models import Assessment, FeatureSearch
from fits.reports.models import Report
from fits.reports.snapshot import Snapshot


def create_report(
    *, user: User, assessment: Assessment, title: str, words: str, search: FeatureSearch | None = None
) -> Report:
    """Freeze what the assessment says now, with what a search for features found, and words of the author's."""
    if assessment.status != Assessment.Status.DONE or assessment.result is None or assessment.detail is None:
        raise UserError(
            "assessment-not-done", "this assessment has no result to report", "Wait until it is done"
        )
    features = features_of(search)
    snapshot = Snapshot(assessment.result, assessment.detail, context_of(assessment), features)
    return Report.objects.create(
        collaboration=assessment.release.measurement.collaboration,
        assessment=assessment,
        title=title,
        words=words,
        snapshot=snapshot.stored(),
        author=user,
    )
