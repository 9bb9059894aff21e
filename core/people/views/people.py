"""Who is here, and how that changes."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.http import Http404, HttpResponse
from django.shortcuts import get_object_or_404, redirect, render
from django.views.decorators.http import require_GET, require_http_methods, require_POST

from core.people import services
from core.people.access import Action, load, role_of
from core.people.forms import HandOverForm, LinkInvitationForm, MailInvitationForm, RoleForm
from core.people.models import Collaboration, Invitation, Membership, Role
from core.people.signed_in import SignedInRequest


@dataclass(frozen=True)
class Person:
    """A line of the list: a membership and the form that changes its role."""

    membership: Membership
    form: RoleForm


@login_required
@require_GET
def people(request: SignedInRequest, pk: int) -> HttpResponse:
    """Who is here."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.VIEW, pk)
    return render(request, "people/people.html", people_context(request, collaboration))


@login_required
@require_POST
def change_role(request: SignedInRequest, pk: int, membership_pk: int) -> HttpResponse:
    """Give someone another role."""
    membership = _membership(request, pk, membership_pk)
    form = RoleForm(request.POST)
    if form.is_valid():
        services.change_role(by=request.user, membership=membership, **form.cleaned_data)
        messages.success(request, "The role is changed.")
    else:
        messages.error(request, "The role is not changed: choose one of the list.")
    return redirect("people:people", pk)


@login_required
@require_POST
def remove_member(request: SignedInRequest, pk: int, membership_pk: int) -> HttpResponse:
    """Take someone out of the collaboration."""
    membership = _membership(request, pk, membership_pk)
    services.remove_member(by=request.user, membership=membership)
    if membership.user_id == request.user.pk:
        messages.success(request, "Removed.")
        return redirect("overviews:home")
    messages.success(request, f"{membership.user} is removed. Revoke the open links that they may know.")
    return redirect("people:people", pk)


@login_required
@require_http_methods(["GET", "POST"])
def hand_over(request: SignedInRequest, pk: int, membership_pk: int) -> HttpResponse:
    """Hand over the lead, once it is confirmed."""
    membership = _membership(request, pk, membership_pk)
    form = HandOverForm(request.POST or None, initial={"seen": membership.role})
    if form.is_valid():
        services.hand_over(by=request.user, membership=membership, seen=form.cleaned_data["seen"])
        messages.success(request, f"{membership.user} is a lead now, and you are a member.")
        return redirect("people:people", pk)
    context = {"collaboration": membership.collaboration, "membership": membership, "form": form}
    return render(request, "people/hand_over.html", context)


@login_required
@require_POST
def leave(request: SignedInRequest, pk: int) -> HttpResponse:
    """Go."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.LEAVE, pk)
    services.leave(get_object_or_404(collaboration.memberships.select_related("user"), user=request.user))
    messages.success(request, f"You have left {collaboration}.")
    return redirect("overviews:home")


def people_context(
    request: SignedInRequest,
    collaboration: Collaboration,
    *,
    link_form: LinkInvitationForm | None = None,
    mail_form: MailInvitationForm | None = None,
) -> dict[str, Any]:
    """What the page shows to somebody in their role; with forms that came back with faults."""
    role = role_of(request.user, collaboration)
    is_led = role == Role.LEAD
    return {
        "collaboration": collaboration,
        "people": _people(collaboration),
        "may_manage": is_led,
        "sees_how_they_came": role in (Role.LEAD, Role.MEMBER),
        "invitations": _invitations(collaboration) if is_led else [],
        "link_form": link_form or LinkInvitationForm(prefix="link"),
        "mail_form": mail_form or MailInvitationForm(prefix="mail"),
    }


def _invitations(collaboration: Collaboration) -> Sequence[Invitation]:
    return list(collaboration.invitations.select_related("created_by"))


def _membership(request: SignedInRequest, pk: int, membership_pk: int) -> Membership:
    collaboration = load(Collaboration.objects.all(), request.user, Action.MANAGE, pk)
    memberships = collaboration.memberships.select_related("user", "collaboration")
    membership = memberships.filter(pk=membership_pk).first()
    if membership is None:
        raise Http404
    return membership


def _people(collaboration: Collaboration) -> list[Person]:
    memberships = collaboration.memberships.select_related("user")
    return [
        Person(
            membership,
            RoleForm(
                initial={"role": membership.role, "seen": membership.role},
                person=str(membership.user),
                auto_id=False,
            ),
        )
        for membership in memberships
    ]
