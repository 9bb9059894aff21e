"""What holds for all changes of who belongs to a collaboration, in which role."""

from django.core.exceptions import ValidationError
from django.core.validators import validate_email
from django.db.models import Q, QuerySet
from django.urls import reverse
from django.utils import timezone

from core.errors import UserError
from core.people.log import Deed, record
from core.people.models import Collaboration, Invitation, Membership, Role, User


def lock(collaboration: Collaboration) -> None:
    """Let nobody else change who belongs here, and as what, until this transaction ends."""
    # Not the key: rows that name the collaboration, as entries of the log do, can be written meanwhile.
    Collaboration.objects.select_for_update(no_key=True).get(pk=collaboration.pk)


def known_role(role: str) -> Role:
    """The role of that name."""
    if role not in Role.values:
        raise UserError("role", f"“{role}” is not a role", f"Choose one of {', '.join(Role.values)}")
    return Role(role)


def known_address(email: str) -> str:
    """An e-mail address as it is kept."""
    address = email.strip().lower()
    try:
        validate_email(address)
    except ValidationError:
        raise UserError("email", f"“{email}” is not an e-mail address", "Correct it") from None
    return address


def refuse_who_is_here(address: str, collaboration: Collaboration) -> None:
    """Nobody is added or invited twice."""
    if Membership.objects.filter(user__email=address, collaboration=collaboration).exists():
        raise UserError("already-here", f"{address} is here already", "Change the role in the list instead")


def still_here(membership: Membership) -> Membership:
    """The membership as it stands, now that the collaboration is locked."""
    found = Membership.objects.select_related("user", "collaboration").filter(pk=membership.pk).first()
    if found is None:
        raise UserError("not-here", f"{membership.user} is not here any more", "Look at the list again")
    return found


def still_lead(user: User, collaboration: Collaboration) -> Membership:
    """The membership of whoever changes something, who may have lost the lead while waiting for the lock."""
    led = Membership.objects.filter(user=user, collaboration=collaboration, role=Role.LEAD).first()
    if led is None:
        raise UserError("no-lead", "you do not lead this collaboration any more", "Ask one of its leads")
    return led


def give_up_lead(membership: Membership, *, by: User) -> None:
    """Before a lead leaves or takes another role: another has to be there. Invitations of theirs end with it, or they
    would come back as a lead by a link of their own."""
    if membership.role != Role.LEAD:
        return
    collaboration = membership.collaboration
    leads = Membership.objects.filter(collaboration=collaboration, role=Role.LEAD)
    if not leads.exclude(pk=membership.pk).exists():
        reason = f"{membership.user} is the last lead here"
        raise UserError("last-lead", reason, "Make someone else a lead first")
    theirs = open_invitations().filter(collaboration=collaboration, created_by=membership.user_id)
    if theirs.update(revoked_at=timezone.now()):
        about = f"those that {membership.user} made as a lead"
        url = people_page(collaboration)
        record(Deed.REVOKED_INVITATION, who=by, collaboration=collaboration, about=about, url=url)


def open_invitations() -> QuerySet[Invitation]:
    """Those by which somebody can still join; as a condition in the database, for changes that race."""
    return Invitation.objects.filter(
        Q(is_for_many=True) | Q(uses=0), revoked_at=None, expires_at__gt=timezone.now()
    )


def people_page(collaboration: Collaboration) -> str:
    """Where entries of the log about people lead to."""
    return reverse("people:people", args=[collaboration.pk])
