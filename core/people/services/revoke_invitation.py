"""Close an invitation."""

from django.db import transaction
from django.utils import timezone

from core.people.log import Deed, record
from core.people.models import Invitation, User
from core.people.services.invite_by_mail import shortened
from core.people.services.rules import lock, open_invitations, people_page


@transaction.atomic
def revoke_invitation(*, by: User, invitation: Invitation) -> None:
    """From now on nobody joins by it; one that is closed already stays as it is."""
    # Whoever joins by it at this moment holds the same lock, and takes it first.
    lock(invitation.collaboration)
    if not open_invitations().filter(pk=invitation.pk).update(revoked_at=timezone.now()):
        return
    whom = shortened(invitation.email) if invitation.email else invitation.label or "a link"
    record(
        Deed.REVOKED_INVITATION,
        who=by,
        collaboration=invitation.collaboration,
        about=f"{whom}, as {invitation.role}",
        url=people_page(invitation.collaboration),
    )
