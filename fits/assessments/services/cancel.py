"""Cancel an assessment."""

from fits.assessments import leases
from fits.assessments.models import Assessment


def cancel_assessment(assessment: Assessment) -> None:
    """Cancel at once what still waits; what runs ends at its worker's next look; what has ended stays."""
    row = Assessment.objects.filter(pk=assessment.pk)
    waiting = row.filter(status=Assessment.Status.QUEUED)
    if not leases.end(waiting, Assessment.Status.CANCELLED):
        row.filter(status=Assessment.Status.RUNNING).update(cancel_requested=True)
    assessment.refresh_from_db()
