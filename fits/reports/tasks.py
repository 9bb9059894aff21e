"""What workers do for reports."""

from celery.exceptions import SoftTimeLimitExceeded

from core import alive
from core.user_error import UserError
from core.worker import app
from fits.assessments import leases
from fits.assessments.tasks import ending
from fits.reports.models import Paper, Printing


@app.task(name="fits.reports.tasks.print_report")  # type: ignore[untyped-decorator]
def print_report(pk: int) -> None:
    """Print a report, unless that has ended or a living worker has it."""
    lease = leases.take(Printing, pk)
    if lease is None:
        return
    # Loaded here, since what draws charts takes a second to load, and workers that never print need none of it.
    from fits.reports.printing import printed

    with ending(lease, f"printing {pk}"):
        printing = Printing.objects.select_related(
            "report__collaboration", "report__author", "report__previous"
        ).get(pk=pk)
        try:
            pdf = printed(printing.report, Paper(printing.paper), leases.Heartbeat(lease))
        except SoftTimeLimitExceeded as error:
            raise UserError(
                "took-too-long",
                "it took longer than it may",
                "Write reports of fewer parts instead of this one",
            ) from error
        lease.finish(pdf=pdf)
    alive.touch()
