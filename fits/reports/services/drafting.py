"""What all changes of a draft have in common: they wait for one another, and none is made to what is frozen."""

from django.db.models import F

from core.revision import CHANGED_MEANWHILE
from core.user_error import UserError
from fits.reports.models import Report


def change_draft(report: Report, *, seen: int | None = None) -> None:
    """Raise the revision of a draft, within a transaction: whoever else changes it waits until that ends.

    seen  the revision that the change is meant for; None where something of its own says that
    Raises UserError `report-frozen`, or `changed-meanwhile`.
    """
    drafts = Report.objects.filter(pk=report.pk, state=Report.State.DRAFT)
    if seen is not None:
        drafts = drafts.filter(revision=seen)
    if drafts.update(revision=F("revision") + 1):
        report.refresh_from_db()
        return
    if Report.objects.filter(pk=report.pk, state=Report.State.FROZEN).exists():
        raise UserError(
            "report-frozen",
            "this report has been frozen, and never changes any more",
            "Write a later version of it",
        )
    raise UserError(
        CHANGED_MEANWHILE,
        "somebody else has changed this draft since you opened it",
        "Go back to its page, look at what stands there now, and do it again",
    )
