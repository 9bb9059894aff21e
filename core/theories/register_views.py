"""The register of a sealed measurement, as a page and as a table."""

from django.contrib.auth.decorators import login_required
from django.http import Http404, HttpResponse
from django.shortcuts import render
from django.views.decorators.http import require_safe

from core.measurements.models import Measurement
from core.people.access import Action, load
from core.people.signed_in import SignedInRequest
from core.theories.register import csv_lines, register_page


@login_required
@require_safe
def register(request: SignedInRequest, pk: int) -> HttpResponse:
    """Who submitted which curve when, and who saw the data before they were open."""
    measurement = _sealed(request, pk)
    page = register_page(measurement, request.user)
    context = {
        "measurement": measurement,
        "collaboration": measurement.collaboration,
        "page": page,
        "seal": page.seal,
    }
    return render(request, "theories/register.html", context)


@login_required
@require_safe
def register_csv(request: SignedInRequest, pk: int) -> HttpResponse:
    """The same curves as CSV."""
    page = register_page(_sealed(request, pk), request.user)
    return HttpResponse(
        "".join(csv_lines(page)),
        content_type="text/csv; charset=utf-8",
        headers={"Content-Disposition": 'attachment; filename="register.csv"'},
    )


def _sealed(request: SignedInRequest, pk: int) -> Measurement:
    rows = Measurement.objects.select_related("collaboration", "opened_by")
    measurement = load(rows, request.user, Action.VIEW, pk)
    if not measurement.was_sealed:
        raise Http404
    return measurement
