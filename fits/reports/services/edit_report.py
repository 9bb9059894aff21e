"""Change the words of a draft, or give it up."""

from django.db import transaction

from core.people.log import Deed
from core.people.models import User
from core.revision import save_if_current
from core.user_error import UserError
from fits.reports.models import Report
from fits.reports.services.drafting import change_draft
from fits.reports.services.start_report import record_draft


@transaction.atomic
def edit_report(*, report: Report, seen: int) -> None:
    """Keep title and opening words, as they stand on `report`."""
    # Whoever freezes it at this moment comes first or comes after.
    drafts = Report.objects.select_for_update(no_key=True).filter(pk=report.pk, state=Report.State.DRAFT)
    if drafts.order_by("pk").values_list("pk").first() is None:
        raise UserError(
            "report-frozen",
            "this report has been frozen or discarded",
            "Look at its page, or write a later version",
        )
    save_if_current(report, seen=seen, fields=("title", "words"))


@transaction.atomic
def discard_report(*, user: User, report: Report, seen: int) -> None:
    """Delete a draft with all its words."""
    change_draft(report, seen=seen)
    record_draft(Deed.DISCARDED_REPORT, report, user)
    report.delete()
