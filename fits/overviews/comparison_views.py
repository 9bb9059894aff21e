"""The pages that compare theories across measurements."""

from django.contrib.auth.decorators import login_required
from django.http import HttpResponse
from django.shortcuts import render
from django.views.decorators.http import require_safe

from core.measurements.models import Measurement
from core.people.access import Action, load
from core.people.models import Collaboration
from core.people.signed_in import SignedInRequest
from fits.overviews.comparison import comparison_of
from fits.overviews.comparison_choice import LEVELS, VERDICTS
from fits.overviews.comparison_csv import comparison_csv
from fits.overviews.pairs import pairs_page
from fits.overviews.separation import separation_page
from fits.reports import numbers
from fits.reports.files import text_file


@login_required
@require_safe
def comparison(request: SignedInRequest, pk: int) -> HttpResponse:
    """How every theory stands on every measurement, and jointly."""
    row = load(Collaboration.objects.all(), request.user, Action.VIEW, pk)
    context = {
        "collaboration": row,
        "page": comparison_of(row, request.user, request.GET),
        "levels": [(level, numbers.level_words(level)) for level in LEVELS],
        "verdicts": VERDICTS.items(),
    }
    return render(request, "overviews/comparison.html", context)


@login_required
@require_safe
def comparison_table(request: SignedInRequest, pk: int) -> HttpResponse:
    """The comparison as CSV, as it is chosen."""
    row = load(Collaboration.objects.all(), request.user, Action.VIEW, pk)
    found = comparison_of(row, request.user, request.GET)
    return text_file(comparison_csv(found), "text/csv", "comparison.csv")


@login_required
@require_safe
def separation(request: SignedInRequest, pk: int) -> HttpResponse:
    """Which measurement separates two theories best."""
    row = load(Collaboration.objects.all(), request.user, Action.VIEW, pk)
    first, second = request.GET.get("first", ""), request.GET.get("second", "")
    page = separation_page(row, request.user, first, second)
    return render(request, "overviews/separation.html", {"collaboration": row, "page": page})


@login_required
@require_safe
def pairs(request: SignedInRequest, pk: int) -> HttpResponse:
    """Which curves of a measurement cannot both be inside."""
    row = load(Measurement.objects.select_related("collaboration"), request.user, Action.VIEW, pk)
    page = pairs_page(row, request.user, request.GET.get("theory", ""))
    context = {"collaboration": row.collaboration, "measurement": row, "page": page}
    return render(request, "overviews/pairs.html", context)
