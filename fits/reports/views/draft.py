"""A report while it is written: begin it, change its words, freeze or discard it."""

from typing import Any

from django.contrib.auth.decorators import login_required
from django.db.models import Count, QuerySet
from django.http import HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.cache import never_cache
from django.views.decorators.http import require_GET, require_http_methods, require_POST

from core.errors import UserError
from core.people.access import Action, in_overview, load
from core.people.forms import explain
from core.people.models import Collaboration, User
from core.people.signed_in import SignedInRequest
from core.revision import CHANGED_MEANWHILE
from fits.assessments.models import Assessment
from fits.reports import services
from fits.reports.draft_forms import AddPartForm, IntoReportForm, NewReportForm, ReportWordsForm, SeenForm
from fits.reports.feature_searches import searches_of
from fits.reports.models import Report, ReportPart
from fits.reports.newest_assessments import newest_keys
from fits.reports.readable import RELEASE_BYTES, with_place
from fits.reports.report_context import report_context
from fits.reports.services.parts import refuse_unreportable


@login_required
@require_http_methods(["GET", "POST"])
def new_draft(request: SignedInRequest, pk: int) -> HttpResponse:
    """Begin an empty report."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.REPORT, pk)
    form = NewReportForm(request.POST or None)
    if form.is_valid():
        title = form.cleaned_data["title"]
        return redirect(services.start_report(user=request.user, collaboration=collaboration, title=title))
    return render(request, "reports/new_draft.html", {"form": form, "collaboration": collaboration})


@login_required
@require_http_methods(["GET", "POST"])
def new_report(request: SignedInRequest, pk: int) -> HttpResponse:
    """Put an assessment into a new report, or into a draft that is there."""
    places = Assessment.objects.select_related("release__measurement__collaboration", "requested_by")
    found = load(places.defer("result", "detail"), request.user, Action.REPORT, pk)
    refuse_unreportable(found)
    measurement = found.release.measurement
    drafts = Report.objects.filter(collaboration=measurement.collaboration, state=Report.State.DRAFT)
    form = IntoReportForm(
        request.POST or None, drafts=drafts, initial={"title": f"{measurement}, {found.release}"}
    )
    searches = searches_of(found, request.GET.get("search"))
    if form.is_valid():
        into = form.cleaned_data["into"]
        if into is None:
            into = services.start_report(
                user=request.user,
                collaboration=measurement.collaboration,
                title=form.cleaned_data["title"],
                assessment=found,
                search=searches.shown,
            )
        else:
            services.add_part(report=into, seen=into.revision, assessment=found, search=searches.shown)
        return redirect(into)
    context = {
        "form": form,
        "assessment": found,
        "measurement": measurement,
        "collaboration": measurement.collaboration,
        "searches": searches,
    }
    return render(request, "reports/report_form.html", context)


def draft_page(request: SignedInRequest, found: Report) -> HttpResponse:
    """Its words and parts, each with what can be done to it."""
    parts = (
        ReportPart.objects.filter(report=found)
        .select_related("assessment__release__measurement")
        .defer("snapshot", "assessment__result", "assessment__detail", *RELEASE_BYTES)
        .annotate(judged=Count("assessment__curves"))
    )
    rows = list(parts)
    newest = newest_keys({part.assessment.release.measurement_id for part in rows if part.assessment})
    context = {
        "report": found,
        "collaboration": found.collaboration,
        "parts": [_row(part, newest) for part in rows],
        "add_form": AddPartForm(
            assessments=addable(found.collaboration, request.user), initial={"seen": found.revision}
        ),
    }
    return render(request, "reports/draft.html", context)


def _row(part: ReportPart, newest: dict[int, tuple[int, int]]) -> dict[str, Any]:
    """A part as the draft lists it, with a newer assessment if there is one."""
    assessment = part.assessment
    key, number = newest.get(assessment.release.measurement_id, (0, 0)) if assessment else (0, 0)
    is_newer = assessment is not None and (number, key) > (assessment.release.number or 0, assessment.pk)
    return {"part": part, "newer": key if is_newer else None, "newer_release": number}


def addable(collaboration: Collaboration, user: User) -> QuerySet[Assessment]:
    """The assessments that can come into a report: done, of shared curves, open to all."""
    done = Assessment.objects.filter(
        release__measurement__collaboration=collaboration, status=Assessment.Status.DONE, desk=None
    )
    shown = in_overview(done, user).select_related("release__measurement")
    fields = ("created_at", "release__number", "release__state", "release__measurement__name")
    return shown.only(*fields).order_by("release__measurement__name", "-release__number", "-pk")


@login_required
@require_http_methods(["GET", "POST"])
def words(request: SignedInRequest, pk: int) -> HttpResponse:
    """Title and opening words."""
    found = load(with_place(), request.user, Action.REPORT, pk)
    if found.is_frozen:
        return redirect(found)
    initial = {"revision": found.revision}
    form = ReportWordsForm(request.POST or None, instance=found, initial=initial)
    if form.is_valid():
        try:
            services.edit_report(report=form.instance, seen=form.cleaned_data["revision"])
        except UserError as error:
            if error.code != CHANGED_MEANWHILE:
                raise
            explain(form, error)
            form.show_what_stands_now(found)
        else:
            return redirect(found)
    context = {"form": form, "report": found, "collaboration": found.collaboration}
    return render(request, "reports/draft_words.html", context)


@login_required
@require_GET
@never_cache
def preview(request: SignedInRequest, pk: int) -> HttpResponse:
    """A draft as it would be read if it were frozen now."""
    found = load(with_place(), request.user, Action.REPORT, pk)
    if found.is_frozen:
        return redirect(found)
    context = report_context(request, found, "report", found.pk)
    return render(request, "reports/preview.html", context | {"collaboration": found.collaboration})


@login_required
@require_POST
def freeze(request: SignedInRequest, pk: int) -> HttpResponse:
    """From now on it never changes."""
    found = load(with_place(), request.user, Action.REPORT, pk)
    form = SeenForm(request.POST)
    if form.is_valid():
        services.freeze_report(user=request.user, report=found, seen=form.cleaned_data["seen"])
    return redirect(found)


@login_required
@require_POST
def discard(request: SignedInRequest, pk: int) -> HttpResponse:
    """Give a draft up."""
    found = load(with_place(), request.user, Action.REPORT, pk)
    form = SeenForm(request.POST)
    if not form.is_valid():
        return redirect(found)
    services.discard_report(user=request.user, report=found, seen=form.cleaned_data["seen"])
    return redirect("reports:reports", found.collaboration_id)


@login_required
@require_POST
def later(request: SignedInRequest, pk: int) -> HttpResponse:
    """Begin a later version of a frozen report."""
    found = load(with_place(), request.user, Action.REPORT, pk)
    return redirect(services.start_later_version(user=request.user, report=found))
