"""An invitation for whoever holds its link, signed in or not."""

from collections.abc import Callable
from functools import wraps

from allauth.account.adapter import get_adapter
from allauth.core import ratelimit
from django.contrib import messages
from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.debug import sensitive_post_parameters
from django.views.decorators.http import require_http_methods

from core.errors import UserError
from core.people import services
from core.people.access import role_of
from core.people.forms import NewcomerForm, explain
from core.people.models import Invitation, Role, User
from core.people.permissions import PERMITTED
from core.people.services.invite import hashed

View = Callable[..., HttpResponse]


class Closed(Exception):
    """The invitation opens nothing."""


def by_invitation(view: Callable[[HttpRequest, Invitation], HttpResponse]) -> View:
    """Gives the view an open invitation.

    One that is unknown, expired, revoked or used up gets one and the same answer. Nothing of an answer is kept or
    indexed, and the address, which is the secret, is told to nobody: other pages learn this site's name at most,
    which its own forms need.
    """

    @require_http_methods(["GET", "HEAD", "POST"])
    @sensitive_post_parameters("password", "again")
    @wraps(view)
    def guarded(request: HttpRequest, token: str) -> HttpResponse:
        invitations = Invitation.objects.select_related("collaboration", "created_by")
        invitation = invitations.filter(token_sha256=hashed(token)).first()
        try:
            if invitation is None or not invitation.is_open:
                raise Closed
            response = view(request, invitation)
            response["Referrer-Policy"] = "strict-origin"
        except Closed:
            response = render(request, "people/invitation_missing.html", status=404)
            response["Referrer-Policy"] = "no-referrer"
        response["X-Robots-Tag"] = "noindex, nofollow"
        response["Cache-Control"] = "no-store"
        return response

    return guarded


@by_invitation
def invitation(request: HttpRequest, invitation: Invitation) -> HttpResponse:
    """Who invites to what, in which role; and the way in."""
    if isinstance(request.user, User):
        return _for_a_user(request, request.user, invitation)
    return _for_a_newcomer(request, invitation)


def _for_a_user(request: HttpRequest, user: User, invitation: Invitation) -> HttpResponse:
    here = role_of(user, invitation.collaboration)
    if request.method == "POST" and here is None:
        try:
            membership = services.join(user=user, invitation=invitation)
        except UserError as error:
            _raise_if_closed(error)
            here = role_of(user, invitation.collaboration)
        else:
            return _welcome(request, invitation, membership.get_role_display())
    return render(request, "people/invitation.html", _context(invitation) | {"here": here})


def _for_a_newcomer(request: HttpRequest, invitation: Invitation) -> HttpResponse:
    form = NewcomerForm(request.POST or None, invitation=invitation)
    if request.method == "POST":
        limited: HttpResponse | None = ratelimit.consume_or_429(request, action="signup")
        if limited is not None:
            return limited
    if form.is_valid():
        given = form.cleaned_data
        try:
            membership = services.join_as_newcomer(
                invitation=invitation, email=given["email"], name=given["name"], password=given["password"]
            )
        except UserError as error:
            _raise_if_closed(error)
            explain(form, error, "email")
        else:
            get_adapter().login(request, membership.user)
            return _welcome(request, invitation, membership.get_role_display())
    return render(request, "people/invitation.html", _context(invitation) | {"form": form})


def _raise_if_closed(error: UserError) -> None:
    # Another has used it, or a lead revoked it, since it was looked at.
    if error.code == "invitation-closed":
        raise Closed from error


def _welcome(request: HttpRequest, invitation: Invitation, role: str) -> HttpResponse:
    messages.success(request, f"You have joined {invitation.collaboration}; your role is {role}.")
    return redirect(invitation.collaboration)


def _context(invitation: Invitation) -> dict[str, object]:
    role = Role(invitation.role)
    permitted = [action.value for action, roles in PERMITTED.items() if role in roles]
    return {"invitation": invitation, "permitted": permitted}
