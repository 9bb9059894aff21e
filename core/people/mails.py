"""The e-mails by which people come here."""

from allauth.account.adapter import get_adapter
from allauth.account.forms import default_token_generator
from allauth.account.utils import user_pk_to_url_str
from allauth.core import context
from allauth.utils import build_absolute_uri
from django.urls import reverse

from core.people.models import Collaboration, Invitation, User


def send_password_link(user: User, collaboration: Collaboration) -> bool:
    """Send the link that sets a password. False outside a web request, where no address of ours is known."""
    if context.request is None:
        return False
    adapter = get_adapter()
    uid, key = user_pk_to_url_str(user), default_token_generator.make_token(user)
    adapter.send_mail(
        "account/email/added",
        user.email,
        {
            "user": user,
            "collaboration": collaboration,
            "password_reset_url": adapter.get_reset_password_from_key_url(f"{uid}-{key}"),
        },
    )
    return True


def send_invitation(invitation: Invitation, secret: str) -> None:
    """Send the link of an invitation to the address that it is for. Asks for a web request, which knows ours."""
    get_adapter().send_mail(
        "account/email/invitation",
        invitation.email,
        {
            "invitation": invitation,
            "address": build_absolute_uri(context.request, reverse("people:invitation", args=[secret])),
        },
    )
