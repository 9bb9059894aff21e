"""The pages that are read. Each loads its row with permission and asks for what it shows."""

from django.contrib.auth.decorators import login_required
from django.http import Http404, HttpResponse
from django.shortcuts import render
from django.utils import timezone
from django.views.decorators.http import require_safe

from core.measurements.models import Measurement
from core.measurements.preview_figure import plotly_json
from core.measurements.seal_page import seal_of
from core.people.access import PERMITTED, Action, load, role_of
from core.people.models import Collaboration
from core.people.signed_in import SignedInRequest
from core.theories.models import Theory
from fits.overviews.collaboration import collaboration_page
from fits.overviews.history_chart import NAME as HISTORY
from fits.overviews.history_chart import history_figure
from fits.overviews.history_part import chosen_theories, history_of, history_part
from fits.overviews.home import home_page
from fits.overviews.look import note_look
from fits.overviews.measurement import measurement_page, newest_data
from fits.overviews.theory import theory_page
from fits.reports.files import figure_file


@login_required
@require_safe
def home(request: SignedInRequest) -> HttpResponse:
    """What is new in my collaborations since I was last here."""
    since, now = request.user.last_looked_at, timezone.now()
    found = home_page(request.user, since)
    note_look(request.user, now)
    return render(request, "overviews/home.html", {"since": since, "found": found})


@login_required
@require_safe
def collaboration(request: SignedInRequest, pk: int) -> HttpResponse:
    """Which measurements exist, how the theories stand on each, who is here."""
    row = load(Collaboration.objects.all(), request.user, Action.VIEW, pk)
    context = {
        "collaboration": row,
        "page": collaboration_page(row, request.user),
        "may": _permitted(request, row),
    }
    return render(request, "overviews/collaboration.html", context)


@login_required
@require_safe
def measurement(request: SignedInRequest, pk: int) -> HttpResponse:
    """What the data look like, which theories survive, and how that moved from release to release."""
    row = load(Measurement.objects.select_related("collaboration"), request.user, Action.VIEW, pk)
    may = _permitted(request, row.collaboration)
    page = measurement_page(row, request.user, with_drafts=may["publish"])
    data = newest_data(page)
    context = {
        "collaboration": row.collaboration,
        "measurement": row,
        "page": page,
        "data": data,
        "figure": plotly_json(data.figure) if data and data.figure else None,
        "seal": seal_of(row, request.user),
        "history": history_part(row, page, chosen_theories(request.GET)),
        "may": may,
    }
    return render(request, "overviews/measurement.html", context)


@login_required
@require_safe
def history_chart(request: SignedInRequest, pk: int, name: str, form: str) -> HttpResponse:
    """The chart of a measurement's history, under the theories in the query."""
    row = load(Measurement.objects.all(), request.user, Action.VIEW, pk)
    if name != HISTORY or form not in {"svg", "csv"}:
        raise Http404
    releases, found = history_of(row, request.user)
    figure = history_figure(found, releases, chosen_theories(request.GET))
    if figure is None:
        raise Http404
    return figure_file(figure, form)


@login_required
@require_safe
def theory(request: SignedInRequest, pk: int) -> HttpResponse:
    """What a theory predicts where, and how it fares."""
    row = load(Theory.objects.select_related("collaboration", "submitted_by"), request.user, Action.VIEW, pk)
    may = _permitted(request, row.collaboration)
    context = {
        "collaboration": row.collaboration,
        "theory": row,
        "page": theory_page(row, request.user),
        "may": may,
        "may_edit": may["manage"] or row.submitted_by_id == request.user.pk,
    }
    return render(request, "overviews/theory.html", context)


def _permitted(request: SignedInRequest, collaboration: Collaboration) -> dict[str, bool]:
    """By the name of the action, whether to show what leads to it."""
    role = role_of(request.user, collaboration)
    return {action.name.lower(): role in PERMITTED[action] for action in Action}
