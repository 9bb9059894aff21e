"""Join a collaboration by an invitation."""

from django.db import IntegrityError, transaction
from django.db.models import F
from django.utils import timezone

from core.errors import UserError
from core.people.log import Deed, record
from core.people.models import Invitation, Membership, User
from core.people.services.invite_by_mail import shortened
from core.people.services.rules import known_address, lock, open_invitations, people_page


@transaction.atomic
def join(*, user: User, invitation: Invitation) -> Membership:
    """Join in the role of the invitation. Who is here already keeps their role, and the invitation its use."""
    lock(invitation.collaboration)
    mine = Membership.objects.filter(user=user, collaboration=invitation.collaboration)
    if here := mine.first():
        reason = f"you are here already, as {here.get_role_display()}"
        raise UserError("already-here", reason, "A lead can change your role")
    _use(invitation)
    # Somebody else's account may take what was mailed to an address: that address is not theirs by it.
    is_proven = invitation.email != "" and invitation.email == user.email
    membership = Membership.objects.create(
        user=user,
        collaboration=invitation.collaboration,
        role=invitation.role,
        came_by=Membership.CameBy.MAIL if is_proven else Membership.CameBy.LINK,
    )
    record(
        Deed.JOINED,
        who=user,
        collaboration=invitation.collaboration,
        about=f"as {invitation.role}, {_way(invitation)} of {invitation.created_by}",
        url=people_page(invitation.collaboration),
    )
    return membership


def join_as_newcomer(*, invitation: Invitation, email: str, name: str, password: str) -> Membership:
    """Make an account and join with it. What was mailed makes an account for the address it was mailed to alone."""
    user = User(email=known_address(invitation.email or email), name=name.strip())
    # Hashing takes its time: a whole class that comes at once is not to wait for it one after the other.
    user.set_password(password)
    return _join_with_account(user, invitation)


@transaction.atomic
def _join_with_account(user: User, invitation: Invitation) -> Membership:
    try:
        with transaction.atomic():
            user.save()
    except IntegrityError:
        raise UserError(
            "address-known",
            "there is an account with this address already",
            "Sign in with it and open the invitation again, or ask for a new password",
        ) from None
    return join(user=user, invitation=invitation)


def _use(invitation: Invitation) -> None:
    """Count the use. Of two who use a link for one at the same moment, the condition lets one through."""
    still_open = open_invitations().filter(pk=invitation.pk)
    if not still_open.update(uses=F("uses") + 1, last_used_at=timezone.now()):
        raise UserError(
            "invitation-closed", "this invitation opens nothing any more", "Ask a lead for a new one"
        )


def _way(invitation: Invitation) -> str:
    if invitation.email:
        return f"by the invitation of {shortened(invitation.email)}"
    return f"by the link “{invitation.label}”" if invitation.label else "by a link"
