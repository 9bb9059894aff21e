"""The parts of a draft."""

from django.contrib.auth.decorators import login_required
from django.db.models import QuerySet
from django.http import HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods, require_POST

from core.errors import UserError
from core.people.access import Action, load
from core.people.forms import explain
from core.people.signed_in import SignedInRequest
from core.revision import CHANGED_MEANWHILE
from fits.assessments.models import Assessment
from fits.reports import services
from fits.reports.draft_forms import AddPartForm, MoveForm, PartForm, SeenForm
from fits.reports.feature_searches import searches_of
from fits.reports.models import ReportPart
from fits.reports.readable import RELEASE_BYTES, with_place
from fits.reports.views.draft import addable

ASSESSED = "assessment__release__measurement"


def _with_place() -> QuerySet[ReportPart]:
    return ReportPart.objects.defer("snapshot").select_related("report__collaboration")


@login_required
@require_POST
def add(request: SignedInRequest, pk: int) -> HttpResponse:
    """A new last part. Words are written at once."""
    found = load(with_place(), request.user, Action.REPORT, pk)
    form = AddPartForm(request.POST, assessments=addable(found.collaboration, request.user))
    if not form.is_valid():
        return redirect(found)
    chosen: Assessment | None = form.cleaned_data["assessment"]
    search = searches_of(chosen).shown if chosen else None
    part = services.add_part(report=found, seen=form.cleaned_data["seen"], assessment=chosen, search=search)
    return redirect(found) if chosen else redirect("reports:part", part.pk)


@login_required
@require_http_methods(["GET", "POST"])
def part(request: SignedInRequest, pk: int) -> HttpResponse:
    """Heading and words of a part, and which theories it shows."""
    places = _with_place().select_related(ASSESSED).defer("assessment__detail", *RELEASE_BYTES)
    found = load(places, request.user, Action.REPORT, pk)
    if found.report.is_frozen:
        return redirect(found.report)
    result = (found.assessment.result if found.assessment else None) or {}
    names = [curve["name"] for curve in result.get("curves", ())]
    form = PartForm(request.POST or None, instance=found, names=names, initial={"revision": found.revision})
    if form.is_valid():
        try:
            services.edit_part(part=form.instance, seen=form.cleaned_data["revision"])
        except UserError as error:
            if error.code != CHANGED_MEANWHILE:
                raise
            explain(form, error)
            form.show_what_stands_now(found)
        else:
            return redirect(found.report)
    context = {
        "form": form,
        "part": found,
        "report": found.report,
        "collaboration": found.report.collaboration,
    }
    return render(request, "reports/draft_part.html", context)


@login_required
@require_POST
def move(request: SignedInRequest, pk: int) -> HttpResponse:
    """One place up or down."""
    found = load(_with_place(), request.user, Action.REPORT, pk)
    form = MoveForm(request.POST)
    if form.is_valid():
        services.move_part(part=found, seen=form.cleaned_data["seen"], up=form.cleaned_data["to"] == "up")
    return redirect(found.report)


@login_required
@require_POST
def remove(request: SignedInRequest, pk: int) -> HttpResponse:
    """Take it out."""
    found = load(_with_place(), request.user, Action.REPORT, pk)
    form = SeenForm(request.POST)
    if form.is_valid():
        services.remove_part(part=found, seen=form.cleaned_data["seen"])
    return redirect(found.report)


@login_required
@require_POST
def renew(request: SignedInRequest, pk: int) -> HttpResponse:
    """Put the newest assessment in its place."""
    places = _with_place().select_related(ASSESSED).defer("assessment__detail", *RELEASE_BYTES)
    found = load(places, request.user, Action.REPORT, pk)
    form = SeenForm(request.POST)
    if form.is_valid():
        services.renew_part(part=found, seen=form.cleaned_data["seen"])
    return redirect(found.report)
