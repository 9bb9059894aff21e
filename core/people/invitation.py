"""The e-mail by which someone new sets a password."""

from allauth.account.adapter import get_adapter
from allauth.account.forms import default_token_generator
from allauth.account.utils import user_pk_to_url_str
from allauth.core import context

from core.people.models import Collaboration, User


def send_invitation(user: User, collaboration: Collaboration) -> bool:
    """Send the link that sets a password. False outside a web request, where no address of ours is known."""
    if context.request is None:
        return False
    adapter = get_adapter()
    uid, key = user_pk_to_url_str(user), default_token_generator.make_token(user)
    adapter.send_mail(
        "account/email/invitation",
        user.email,
        {
            "user": user,
            "collaboration": collaboration,
            "password_reset_url": adapter.get_reset_password_from_key_url(f"{uid}-{key}"),
        },
    )
    return True
