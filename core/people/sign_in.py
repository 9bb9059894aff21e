"""How allauth is bent to this site."""

from allauth.account.adapter import DefaultAccountAdapter
from django.http import HttpRequest


class AccountAdapter(DefaultAccountAdapter):  # type: ignore[misc]
    """Closes sign-up: people come by being added.

    Whoever could take an address without proof that it is theirs would be let in when a lead adds its owner.
    """

    def is_open_for_signup(self, request: HttpRequest) -> bool:
        return False
