"""How allauth is bent to this site."""

from allauth.account.adapter import DefaultAccountAdapter
from django.conf import settings
from django.http import HttpRequest


class AccountAdapter(DefaultAccountAdapter):  # type: ignore[misc]
    """Closes sign-up unless the installation opens it: people come by being added."""

    def is_open_for_signup(self, request: HttpRequest) -> bool:
        return bool(settings.OPEN_SIGN_UP)
