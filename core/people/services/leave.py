"""Leave a collaboration."""

from django.db import transaction

from core.people.log import Deed, record
from core.people.models import Membership
from core.people.services.rules import give_up_lead, lock, people_page, still_here


@transaction.atomic
def leave(membership: Membership) -> None:
    """Go; what they brought stays. The last lead cannot."""
    lock(membership.collaboration)
    kept = still_here(membership)
    give_up_lead(kept, by=kept.user)
    record(
        Deed.LEFT,
        who=kept.user,
        collaboration=kept.collaboration,
        about=f"{kept.role} until then",
        url=people_page(kept.collaboration),
    )
    kept.delete()
