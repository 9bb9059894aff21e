"""How allauth is bent to this site."""

from allauth.account.adapter import DefaultAccountAdapter
from django.http import HttpRequest


class AccountAdapter(DefaultAccountAdapter):  # type: ignore[misc]
    """Closes sign-up: people come by an invitation, whose page makes the account.

    An address taken there by a link is not proven to be theirs who took it. Nothing is opened to it for that: an
    invitation by e-mail is held by whoever reads the e-mail, whichever account they use.
    """

    def is_open_for_signup(self, request: HttpRequest) -> bool:
        return False
