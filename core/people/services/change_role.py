"""Give someone another role."""

from django.db import transaction

from core.errors import UserError
from core.people.log import Deed, record
from core.people.models import Membership, User
from core.people.services.rules import give_up_lead, known_role, lock, people_page, still_here, still_lead


@transaction.atomic
def change_role(*, by: User, membership: Membership, role: str, seen: str) -> None:
    """Another role, for who saw the role `seen`. The last lead keeps it. What stands at a student's desk stays there
    when they become something else, and they go on seeing it."""
    role = known_role(role)
    lock(membership.collaboration)
    still_lead(by, membership.collaboration)
    kept = still_here(membership)
    refuse_if_changed(kept, seen)
    if role == kept.role:
        return
    give_up_lead(kept, by=by)
    before, kept.role = kept.role, role
    kept.save(update_fields=["role"])
    record(
        Deed.CHANGED_ROLE,
        who=by,
        collaboration=kept.collaboration,
        about=f"{kept.user}, from {before} to {role}",
        url=people_page(kept.collaboration),
    )


def refuse_if_changed(membership: Membership, seen: str) -> None:
    """Nobody replaces a role that they have not seen."""
    if membership.role != seen:
        raise UserError(
            "role-changed-meanwhile",
            f"the role of {membership.user} is {membership.get_role_display()} by now: somebody else has changed it",
            "Look at the list again and change the role there, if it still has to be",
        )
