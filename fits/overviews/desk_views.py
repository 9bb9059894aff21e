"""The leads' page of all desks."""

from django.contrib.auth.decorators import login_required
from django.http import HttpResponse
from django.shortcuts import render
from django.views.decorators.http import require_safe

from core.people.access import Action, load
from core.people.models import Collaboration
from core.people.signed_in import SignedInRequest
from fits.overviews.desks import desks_csv, desks_page
from fits.reports.files import text_file


@login_required
@require_safe
def desks(request: SignedInRequest, pk: int) -> HttpResponse:
    """What every student submitted, when, and how it stands."""
    row = load(Collaboration.objects.all(), request.user, Action.DESKS, pk)
    page = desks_page(row, request.user, request.GET.dict())
    context = {"collaboration": row, "page": page, "query": request.GET.urlencode()}
    return render(request, "overviews/desks.html", context)


@login_required
@require_safe
def desks_table(request: SignedInRequest, pk: int) -> HttpResponse:
    """The same as CSV."""
    row = load(Collaboration.objects.all(), request.user, Action.DESKS, pk)
    page = desks_page(row, request.user, request.GET.dict())
    return text_file(desks_csv(page), "text/csv", "desks.csv")
