"""Start a collaboration or change its words."""

from django.db import transaction

from core.people.log import Deed, record
from core.people.models import Collaboration, Membership, Role, User
from core.revision import save_if_current


@transaction.atomic
def create_collaboration(*, user: User, name: str, about: str = "") -> Collaboration:
    """A new collaboration, led by its creator."""
    collaboration = Collaboration.objects.create(name=name, about=about)
    Membership.objects.create(
        user=user, collaboration=collaboration, role=Role.LEAD, came_by=Membership.CameBy.START
    )
    url = collaboration.get_absolute_url()
    record(Deed.STARTED, who=user, collaboration=collaboration, about=name, url=url)
    return collaboration


@transaction.atomic
def edit_collaboration(*, user: User, collaboration: Collaboration, name: str, about: str, seen: int) -> None:
    """Another name or description, for who saw its revision `seen`."""
    collaboration.name, collaboration.about = name, about
    save_if_current(collaboration, seen=seen, fields=["name", "about"])
    url = collaboration.get_absolute_url()
    record(Deed.EDITED_COLLABORATION, who=user, collaboration=collaboration, about=name, url=url)
