"""Reports as overviews list them."""

from collections.abc import Iterable

from django.db.models import Q, QuerySet

from core.measurements.models import Release
from core.people.access import PERMITTED, Action, in_overview, seen_by
from core.people.models import Membership, User
from fits.reports.models import Report, ReportPart


def reports_seen(reader: User, collaborations: Iterable[int]) -> QuerySet[Report]:
    """The reports of these collaborations that this reader may read: drafts are for those who write them, and one
    that tells of a measurement is sealed with it."""
    mine = Membership.objects.filter(user=reader, collaboration__in=collaborations)
    reading = mine.filter(role__in=PERMITTED[Action.READ_REPORTS]).values("collaboration")
    writing = mine.filter(role__in=PERMITTED[Action.REPORT]).values("collaboration")
    sealed = ReportPart.objects.filter(assessment__isnull=False).exclude(
        assessment__release__in=seen_by(Release.objects.all(), reader)
    )
    readable = Q(state=Report.State.FROZEN, collaboration__in=reading) | Q(collaboration__in=writing)
    return in_overview(Report.objects.filter(readable).exclude(pk__in=sealed.values("report")), reader)
