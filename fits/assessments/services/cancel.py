"""Cancel an assessment."""

from django.db import transaction

from core.people.log import Deed
from core.people.models import User
from fits.assessments import leases
from fits.assessments.models import Assessment
from fits.assessments.services.logged import record_deed


@transaction.atomic
def cancel_assessment(assessment: Assessment, *, by: User) -> None:
    """Cancel at once what still waits; what runs ends at its worker's next look; what has ended stays."""
    row = Assessment.objects.filter(pk=assessment.pk)
    waiting = row.filter(status=Assessment.Status.QUEUED)
    changed = leases.end(waiting, Assessment.Status.CANCELLED) or row.filter(
        status=Assessment.Status.RUNNING, cancel_requested=False
    ).update(cancel_requested=True)
    assessment.refresh_from_db()
    if changed:
        record_deed(Deed.CANCELLED_ASSESSMENT, assessment, by)
