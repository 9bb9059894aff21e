"""Changes to collaborations and to who belongs to them, one function each."""

from core.people.services.add_member import add_member
from core.people.services.change_role import change_role
from core.people.services.collaboration import create_collaboration, edit_collaboration
from core.people.services.hand_over import hand_over
from core.people.services.invite import NewInvitation, invite_by_link
from core.people.services.invite_by_mail import MailedInvitation, invite_by_mail
from core.people.services.join import join, join_as_newcomer
from core.people.services.leave import leave
from core.people.services.preferences import set_preferences
from core.people.services.remove_member import remove_member
from core.people.services.revoke_invitation import revoke_invitation

__all__ = [
    "MailedInvitation",
    "NewInvitation",
    "add_member",
    "change_role",
    "create_collaboration",
    "edit_collaboration",
    "hand_over",
    "invite_by_link",
    "invite_by_mail",
    "join",
    "join_as_newcomer",
    "leave",
    "remove_member",
    "revoke_invitation",
    "set_preferences",
]
