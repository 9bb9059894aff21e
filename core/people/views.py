"""Pages of collaborations and their people."""

from dataclasses import dataclass

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.http import Http404, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods, require_POST

from core.errors import UserError
from core.people import services
from core.people.access import Action, load, may
from core.people.forms import CollaborationForm, MemberForm, RoleForm, explain
from core.people.models import Collaboration, Membership
from core.people.signed_in import SignedInRequest


@dataclass(frozen=True)
class Person:
    """A line of the list: a membership and the form that changes its role."""

    membership: Membership
    form: RoleForm


@login_required
@require_http_methods(["GET", "POST"])
def new_collaboration(request: SignedInRequest) -> HttpResponse:
    """Start a collaboration."""
    form = CollaborationForm(request.POST or None)
    if form.is_valid():
        collaboration = services.create_collaboration(user=request.user, **form.cleaned_data)
        return redirect(collaboration)
    return render(request, "people/collaboration_form.html", {"form": form})


@login_required
@require_http_methods(["GET", "POST"])
def edit_collaboration(request: SignedInRequest, pk: int) -> HttpResponse:
    """Change a collaboration's words."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.MANAGE, pk)
    kept = {"name": collaboration.name, "about": collaboration.about}
    form = CollaborationForm(request.POST or None, initial=kept)
    if form.is_valid():
        services.edit_collaboration(collaboration=collaboration, **form.cleaned_data)
        return redirect(collaboration)
    context = {"form": form, "collaboration": collaboration}
    return render(request, "people/collaboration_form.html", context)


@login_required
@require_http_methods(["GET", "POST"])
def people(request: SignedInRequest, pk: int) -> HttpResponse:
    """Who is here; a lead adds people by e-mail address."""
    action = Action.MANAGE if request.method == "POST" else Action.VIEW
    collaboration = load(Collaboration.objects.all(), request.user, action, pk)
    form = MemberForm(request.POST or None)
    if form.is_valid():
        try:
            services.add_member(collaboration=collaboration, **form.cleaned_data)
        except UserError as error:
            explain(form, error, "email")
        else:
            messages.success(request, "Added.")
            return redirect("people:people", pk)
    context = {
        "collaboration": collaboration,
        "people": _people(collaboration),
        "may_manage": may(request.user, Action.MANAGE, collaboration),
        "form": form,
    }
    return render(request, "people/people.html", context)


@login_required
@require_POST
def change_role(request: SignedInRequest, pk: int, membership_pk: int) -> HttpResponse:
    """Give someone another role."""
    membership = _membership(request, pk, membership_pk)
    form = RoleForm(request.POST)
    if form.is_valid():
        services.change_role(membership, form.cleaned_data["role"])
        messages.success(request, "The role is changed.")
    return redirect("people:people", pk)


@login_required
@require_POST
def remove_member(request: SignedInRequest, pk: int, membership_pk: int) -> HttpResponse:
    """Take someone out of the collaboration."""
    membership = _membership(request, pk, membership_pk)
    services.remove_member(membership)
    messages.success(request, "Removed.")
    if membership.user_id == request.user.pk:
        return redirect("overviews:home")
    return redirect("people:people", pk)


def _membership(request: SignedInRequest, pk: int, membership_pk: int) -> Membership:
    collaboration = load(Collaboration.objects.all(), request.user, Action.MANAGE, pk)
    membership = collaboration.memberships.select_related("user").filter(pk=membership_pk).first()
    if membership is None:
        raise Http404
    return membership


def _people(collaboration: Collaboration) -> list[Person]:
    memberships = collaboration.memberships.select_related("user")
    return [
        Person(
            membership,
            RoleForm(initial={"role": membership.role}, person=str(membership.user), auto_id=False),
        )
        for membership in memberships
    ]
