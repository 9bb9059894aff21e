"""What someone wants for themselves."""

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.http import HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods

from core.people import services
from core.people.forms import PreferencesForm
from core.people.signed_in import SignedInRequest


@login_required
@require_http_methods(["GET", "POST"])
def preferences(request: SignedInRequest) -> HttpResponse:
    """Name, and how often an e-mail comes."""
    kept = {"name": request.user.name, "digest": request.user.digest}
    form = PreferencesForm(request.POST or None, initial=kept)
    if form.is_valid():
        services.set_preferences(user=request.user, **form.cleaned_data)
        messages.success(request, "Saved.")
        return redirect("people:preferences")
    return render(request, "people/preferences.html", {"form": form})
