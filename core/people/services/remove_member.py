"""Take someone out of a collaboration."""

from django.db import transaction

from core.people.log import Deed, record
from core.people.models import Membership, User
from core.people.services.rules import give_up_lead, lock, people_page, still_here, still_lead


@transaction.atomic
def remove_member(*, by: User, membership: Membership) -> None:
    """Take someone out; what they brought stays. The last lead cannot go."""
    lock(membership.collaboration)
    still_lead(by, membership.collaboration)
    kept = still_here(membership)
    give_up_lead(kept, by=by)
    record(
        Deed.REMOVED_PERSON,
        who=by,
        collaboration=kept.collaboration,
        about=f"{kept.user}, {kept.role} until then",
        url=people_page(kept.collaboration),
    )
    kept.delete()
