"""Start a collaboration, change its words."""

from django.contrib.auth.decorators import login_required
from django.http import HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods

from core.errors import UserError
from core.people import services
from core.people.access import Action, load
from core.people.forms import CollaborationForm, CollaborationWordsForm, explain
from core.people.models import Collaboration
from core.people.signed_in import SignedInRequest


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
    kept = {"name": collaboration.name, "about": collaboration.about, "revision": collaboration.revision}
    form = CollaborationWordsForm(request.POST or None, initial=kept)
    if form.is_valid():
        words = dict(form.cleaned_data)
        seen = words.pop("revision")
        try:
            services.edit_collaboration(user=request.user, collaboration=collaboration, seen=seen, **words)
        except UserError as error:
            explain(form, error)
            form.show_what_stands_now(collaboration)
        else:
            return redirect(collaboration)
    context = {"form": form, "collaboration": collaboration}
    return render(request, "people/collaboration_form.html", context)
