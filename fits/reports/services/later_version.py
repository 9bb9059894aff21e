"""Write a later version of a frozen report."""

from django.db import transaction

from core.people.models import User
from core.user_error import UserError
from fits.reports.models import Report, ReportPart
from fits.reports.services.start_report import start_report

COPIED = ("order", "heading", "words", "shown", "assessment_id", "search_id")


@transaction.atomic
def start_later_version(*, user: User, report: Report) -> Report:
    """A draft with the same words and parts, which points back to this one."""
    if not report.is_frozen:
        raise UserError("report-not-frozen", "this report is a draft", "Change it itself")
    later = start_report(
        user=user,
        collaboration=report.collaboration,
        title=report.title,
        words=report.words,
        previous=report,
    )
    for values in report.parts.values(*COPIED):
        ReportPart.objects.create(report=later, **values)
    return later
