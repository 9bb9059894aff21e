"""When someone last looked at the home page."""

from datetime import datetime

from django.db.models import Q

from core.people.models import User


def note_look(user: User, at: datetime) -> None:
    """Remember this look, unless a later one is remembered already (two tabs may answer out of order)."""
    earlier = Q(last_looked_at=None) | Q(last_looked_at__lt=at)
    User.objects.filter(earlier, pk=user.pk).update(last_looked_at=at)
