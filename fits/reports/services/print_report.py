"""Have a report printed."""

from functools import partial

from django.db import transaction

from core.user_error import UserError
from fits.assessments.dispatch import enqueue
from fits.reports.models import Paper, Printing, Report


@transaction.atomic
def ask_printing(report: Report, paper: Paper) -> Printing:
    """The print for this paper: made already, under way, or asked for now."""
    if not report.is_frozen:
        raise UserError("report-not-frozen", "this report is a draft", "Freeze it first")
    printing, is_new = Printing.objects.defer("pdf").get_or_create(report=report, paper=paper)
    if is_new:
        transaction.on_commit(partial(enqueue, Printing, printing.pk))
    return printing


@transaction.atomic
def print_again(printing: Printing) -> None:
    """Try once more what has failed."""
    status = Printing.Status
    failed = Printing.objects.filter(pk=printing.pk, status__in=(status.FAILED, status.CANCELLED))
    if failed.update(
        status=status.QUEUED,
        attempt=0,
        heartbeat_at=None,
        cancel_requested=False,
        failure="",
        failure_code="",
    ):
        transaction.on_commit(partial(enqueue, Printing, printing.pk))
