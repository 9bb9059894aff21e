"""Which reports somebody reads: frozen ones who may read reports; drafts the leads."""

from django.db.models import BooleanField, Case, Q, QuerySet, Value, When
from django.http import Http404

from core.people.access import PERMITTED, Action, Someone, load, may
from core.people.models import Collaboration, Role
from fits.reports.models import Report, ReportPart

# Large columns of releases, which nothing of a report is made from.
RELEASE_BYTES = tuple(
    f"assessment__release__{name}" for name in ("table", "lines", "covariance", "variances", "windows")
)


def with_place() -> QuerySet[Report]:
    """Reports with all that stands at their head."""
    return Report.objects.select_related("collaboration", "author", "previous")


def load_readable(user: Someone, pk: int) -> Report:
    """A report that this user may read; 404 for what is not theirs to see, 403 for who reads no reports."""
    found = load(with_place(), user, Action.READ_REPORTS, pk)
    if not found.is_frozen and not may(user, Action.REPORT, found.collaboration):
        raise Http404
    return found


def readable(reports: QuerySet[Report], collaboration: Collaboration, role: Role | None) -> QuerySet[Report]:
    """Those of a collaboration's reports that somebody in this role reads."""
    states = []
    if role in PERMITTED[Action.READ_REPORTS]:
        states.append(Report.State.FROZEN)
    if role in PERMITTED[Action.REPORT]:
        states.append(Report.State.DRAFT)
    return reports.filter(collaboration=collaboration, state__in=states)


def parts_of(report: Report) -> list[ReportPart]:
    """Its parts in order, without the large columns of those that are frozen; in one query."""
    parts = ReportPart.objects.filter(report=report).defer("snapshot")
    if report.is_frozen:
        is_there = When(Q(snapshot__isnull=False), then=Value(True))
        parts = parts.annotate(has_snapshot=Case(is_there, default=Value(False), output_field=BooleanField()))
    else:
        parts = parts.select_related("assessment__release__measurement__collaboration", "search")
        parts = parts.defer("snapshot", "assessment__result", "assessment__detail", *RELEASE_BYTES)
    found = list(parts)
    for part in found:
        part.report = report
    return found
