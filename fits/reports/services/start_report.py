"""Begin a report."""

from django.db import transaction

from core.people.log import Deed, record
from core.people.models import Collaboration, User
from fits.assessments.models import Assessment, FeatureSearch
from fits.reports.models import Report
from fits.reports.services.parts import add_part


@transaction.atomic
def start_report(
    *,
    user: User,
    collaboration: Collaboration,
    title: str,
    words: str = "",
    assessment: Assessment | None = None,
    search: FeatureSearch | None = None,
    previous: Report | None = None,
) -> Report:
    """A draft, with this assessment as its first part if one is given."""
    report = Report.objects.create(
        collaboration=collaboration, title=title, words=words, author=user, previous=previous
    )
    if assessment is not None:
        add_part(report=report, seen=report.revision, assessment=assessment, search=search)
    record_draft(Deed.WROTE_REPORT, report, user)
    return report


def record_draft(deed: Deed, report: Report, user: User) -> None:
    """Tell it in the log without the title: those who read that see no drafts."""
    record(
        deed,
        who=user,
        collaboration=report.collaboration,
        about=f"draft {report.pk}",
        url="" if deed is Deed.DISCARDED_REPORT else report.get_absolute_url(),
    )
