"""The log of a collaboration: a page, and a table to take along."""

from django.contrib.auth.decorators import login_required
from django.http import HttpResponse, StreamingHttpResponse
from django.shortcuts import render
from django.views.decorators.http import require_safe

from core.errors import UserError
from core.people.access import Action, load
from core.people.models import Collaboration
from core.people.signed_in import SignedInRequest
from fits.talk.forms import LogFilter
from fits.talk.log_page import LogPage, Place, csv_lines, entries_of, log_page, people_in


@login_required
@require_safe
def log(request: SignedInRequest, pk: int) -> HttpResponse:
    """Who did what, newest first."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.READ_LOG, pk)
    entries = entries_of(collaboration, request.user)
    form = LogFilter(request.GET, people=people_in(entries))
    page = LogPage((), None)
    if form.is_valid():
        page = log_page(form.narrow(entries), Place.read(request.GET.get("before", "")))
    chosen = request.GET.copy()
    chosen.pop("before", None)
    context = {
        "collaboration": collaboration,
        "form": form,
        "page": page,
        "is_filtered": any(chosen.values()),
        "query": chosen.urlencode(),
        "is_newest": "before" not in request.GET,
    }
    return render(request, "talk/log.html", context)


@login_required
@require_safe
def log_csv(request: SignedInRequest, pk: int) -> StreamingHttpResponse:
    """The chosen entries as CSV."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.READ_LOG, pk)
    entries = entries_of(collaboration, request.user)
    form = LogFilter(request.GET, people=people_in(entries))
    if not form.is_valid():
        raise UserError(
            "filter", "the choice of entries cannot be read", "Choose them on the page of the log"
        )
    return StreamingHttpResponse(
        csv_lines(form.narrow(entries), request.build_absolute_uri("/").rstrip("/")),
        content_type="text/csv; charset=utf-8",
        headers={"Content-Disposition": 'attachment; filename="log.csv"'},
    )
