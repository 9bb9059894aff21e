"""Reports as overviews list them."""

from collections.abc import Iterable

from django.db.models import QuerySet

from core.people.access import PERMITTED, Action, in_overview
from core.people.models import Membership, User
from fits.reports.models import Report


def reports_seen(reader: User, collaborations: Iterable[int]) -> QuerySet[Report]:
    """The reports of these collaborations that this reader may read."""
    reading = Membership.objects.filter(
        user=reader, collaboration__in=collaborations, role__in=PERMITTED[Action.READ_REPORTS]
    )
    return in_overview(Report.objects.filter(collaboration__in=reading.values("collaboration")), reader)
