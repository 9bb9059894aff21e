"""Hand over the lead."""

from django.db import transaction

from core.errors import UserError
from core.people.log import Deed, record
from core.people.models import Membership, Role, User
from core.people.services.change_role import refuse_if_changed
from core.people.services.rules import give_up_lead, lock, people_page, still_here, still_lead


@transaction.atomic
def hand_over(*, by: User, membership: Membership, seen: str) -> None:
    """Make this person, whose role `seen` was seen, a lead, and the lead who does it a member."""
    lock(membership.collaboration)
    own = still_lead(by, membership.collaboration)
    heir = still_here(membership)
    if heir.pk == own.pk:
        raise UserError("own-lead", "the lead is yours already", "Choose somebody else in the list")
    refuse_if_changed(heir, seen)
    heir.role = Role.LEAD
    heir.save(update_fields=["role"])
    give_up_lead(own, by=by)
    own.role = Role.MEMBER
    own.save(update_fields=["role"])
    record(
        Deed.HANDED_OVER,
        who=by,
        collaboration=heir.collaboration,
        about=f"to {heir.user}, {seen} until then",
        url=people_page(heir.collaboration),
    )
