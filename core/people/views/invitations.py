"""Invitations as a lead sees them: made, sent, revoked."""

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.http import HttpResponse
from django.shortcuts import redirect, render
from django.urls import reverse
from django.views.decorators.cache import never_cache
from django.views.decorators.http import require_POST

from core.errors import UserError
from core.people import services
from core.people.access import Action, load
from core.people.forms import LinkInvitationForm, MailInvitationForm, explain
from core.people.models import Collaboration, Invitation
from core.people.signed_in import SignedInRequest
from core.people.views.people import people_context


@login_required
@require_POST
@never_cache
def new_invitation(request: SignedInRequest, pk: int) -> HttpResponse:
    """Make a link. Its secret is in this answer and nowhere else, so that this answer is no redirect."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.MANAGE, pk)
    form = LinkInvitationForm(request.POST, prefix="link")
    if form.is_valid():
        try:
            made = services.invite_by_link(
                by=request.user,
                collaboration=collaboration,
                role=form.cleaned_data["role"],
                label=form.cleaned_data["label"],
                is_for_many=form.cleaned_data["is_for_many"],
                expires_at=form.expires_at(),
            )
        except UserError as error:
            explain(form, error, "is_for_many" if error.code == "many-leads" else None)
        else:
            address = request.build_absolute_uri(reverse("people:invitation", args=[made.secret]))
            context = people_context(request, collaboration)
            context |= {"new_address": address, "new_invitation": made.invitation}
            return render(request, "people/people.html", context)
    context = people_context(request, collaboration, link_form=form)
    return render(request, "people/people.html", context)


@login_required
@require_POST
def mail_invitation(request: SignedInRequest, pk: int) -> HttpResponse:
    """Send a link."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.MANAGE, pk)
    form = MailInvitationForm(request.POST, prefix="mail")
    if form.is_valid():
        try:
            mailed = services.invite_by_mail(
                by=request.user,
                collaboration=collaboration,
                email=form.cleaned_data["email"],
                role=form.cleaned_data["role"],
                expires_at=form.expires_at(),
            )
        except UserError as error:
            explain(form, error, "email")
        else:
            _tell(request, mailed)
            return redirect("people:people", pk)
    context = people_context(request, collaboration, mail_form=form)
    return render(request, "people/people.html", context)


@login_required
@require_POST
def revoke_invitation(request: SignedInRequest, pk: int) -> HttpResponse:
    """Close an invitation."""
    invitations = Invitation.objects.select_related("collaboration")
    invitation = load(invitations, request.user, Action.MANAGE, pk)
    services.revoke_invitation(by=request.user, invitation=invitation)
    messages.success(request, "The invitation is revoked: nobody joins by it any more.")
    return redirect("people:people", invitation.collaboration_id)


def _tell(request: SignedInRequest, mailed: services.MailedInvitation) -> None:
    address = mailed.invitation.email
    if mailed.fault_id:
        messages.error(
            request,
            f"The e-mail to {address} could not be sent (fault {mailed.fault_id}). Revoke that invitation, then try "
            "again later, or make a link and hand it on yourself.",
        )
    else:
        messages.success(request, f"An invitation is on its way to {address}.")
