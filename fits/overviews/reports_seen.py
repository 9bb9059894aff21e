"""Reports as overviews list them."""

from collections.abc import Iterable

from django.db.models import Q, QuerySet

from core.people.access import PERMITTED, Action, in_overview
from core.people.models import Membership, User
from fits.reports.models import Report


def reports_seen(reader: User, collaborations: Iterable[int]) -> QuerySet[Report]:
    """The reports of these collaborations that this reader may read: drafts are for those who write them.

    Nothing that is sealed or stands at a desk comes into a report.
    """
    mine = Membership.objects.filter(user=reader, collaboration__in=collaborations)
    reading = mine.filter(role__in=PERMITTED[Action.READ_REPORTS]).values("collaboration")
    writing = mine.filter(role__in=PERMITTED[Action.REPORT]).values("collaboration")
    readable = Q(state=Report.State.FROZEN, collaboration__in=reading) | Q(collaboration__in=writing)
    return in_overview(Report.objects.filter(readable), reader)
