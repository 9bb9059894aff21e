"""Who may do what, told from the table that is enforced."""

from django.contrib.auth.decorators import login_required
from django.http import HttpResponse
from django.shortcuts import render
from django.views.decorators.http import require_GET

from core.people.models import Role
from core.people.permissions import PERMITTED
from core.people.permitted_addresses import addresses_by_what_they_ask
from core.people.signed_in import SignedInRequest


@login_required
@require_GET
def permissions(request: SignedInRequest) -> HttpResponse:
    """Each action by role; below, each address by what it asks for."""
    context = {
        "roles": Role.labels,
        "actions": [(action.value, [role in roles for role in Role]) for action, roles in PERMITTED.items()],
        "groups": addresses_by_what_they_ask(),
    }
    return render(request, "people/permissions.html", context)
