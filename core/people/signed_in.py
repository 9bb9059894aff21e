"""The request that a view behind `login_required` gets."""

from django.http import HttpRequest

from core.people.models import User


class SignedInRequest(HttpRequest):
    """A request whose user is one of ours, for the type checker."""

    user: User
