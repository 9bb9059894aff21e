"""The page of an assessment: how far along it is, then its result."""

from typing import Any

from django.contrib.auth.decorators import login_required
from django.db.models import QuerySet
from django.http import Http404, HttpResponse
from django.shortcuts import render
from django.views.decorators.cache import cache_control
from django.views.decorators.http import require_GET

from core.people.access import PERMITTED, Action, load, role_of
from core.people.models import Role
from core.people.signed_in import SignedInRequest
from fits.assessments.context import context_of
from fits.assessments.models import Assessment
from fits.assessments.stages import stages_of
from fits.reports.addresses import RouteAddresses
from fits.reports.feature_searches import searches_of
from fits.reports.features.progress import progress_of
from fits.reports.files import chart_file, features_file, ranking_file, result_file
from fits.reports.forms import WindowsForm
from fits.reports.models import Report
from fits.reports.page import result_page
from fits.reports.readable import readable
from fits.reports.snapshot import Snapshot


def with_place() -> QuerySet[Assessment]:
    """Assessments with all that says where they belong."""
    return Assessment.objects.select_related("release__measurement__collaboration", "requested_by")


@login_required
@require_GET
def assessment(request: SignedInRequest, pk: int) -> HttpResponse:
    """Progress while it is under way, why it ended without a result, or the result."""
    found = load(with_place(), request.user, Action.VIEW, pk)
    if found.status != Assessment.Status.DONE:
        role = role_of(request.user, found.release.measurement.collaboration)
        context = _place(found, role) | {"stages": stages_of(found)}
        return render(request, "assessments/progress.html", context)
    form = WindowsForm(assessment=found)
    return render(request, "reports/assessment.html", result_context(request, found, form))


def result_context(request: SignedInRequest, found: Assessment, form: WindowsForm) -> dict[str, Any]:
    """What the page of a result is filled with; `form` asks for other windows of its features."""
    searches = searches_of(found, request.GET.get("search"))
    page = result_page(
        _snapshot(found, searches.features),
        RouteAddresses("assessment", found.pk, search=searches.shown.pk if searches.shown else None),
        level=request.GET.get("level"),
        curve=request.GET.get("curve"),
    )
    measurement = found.release.measurement
    role = role_of(request.user, measurement.collaboration)
    reports = Report.objects.filter(parts__assessment=found).select_related("author")
    # Reports are read by all who share: nothing sealed and nothing of a desk comes into one.
    is_reportable = found.desk_id is None and not measurement.is_sealed
    return (
        _place(found, role)
        | page
        | {
            "may_report": is_reportable and role in PERMITTED[Action.REPORT],
            "reports": readable(reports, measurement.collaboration, role).distinct(),
            "searches": searches,
            "search": progress_of(searches.running),
            "form": form,
        }
    )


def _place(found: Assessment, role: Role | None) -> dict[str, Any]:
    measurement = found.release.measurement
    return {
        "assessment": found,
        "measurement": measurement,
        "collaboration": measurement.collaboration,
        "may_assess": role in PERMITTED[Action.ASSESS],
    }


@login_required
@require_GET
@cache_control(private=True, max_age=86400)
def chart(request: SignedInRequest, pk: int, name: str, form: str) -> HttpResponse:
    """A chart of the result."""
    return chart_file(request, _loaded_snapshot(request, pk), name, form)


@login_required
@require_GET
def result_json(request: SignedInRequest, pk: int) -> HttpResponse:
    """The whole result."""
    return result_file(_loaded_snapshot(request, pk))


@login_required
@require_GET
def ranking_csv(request: SignedInRequest, pk: int) -> HttpResponse:
    """The ranking table."""
    return ranking_file(_loaded_snapshot(request, pk))


@login_required
@require_GET
def features(request: SignedInRequest, pk: int, name: str) -> HttpResponse:
    """A file of the features."""
    return features_file(request, _loaded_snapshot(request, pk), name)


def _loaded_snapshot(request: SignedInRequest, pk: int) -> Snapshot:
    found = load(with_place(), request.user, Action.VIEW, pk)
    return _snapshot(found, searches_of(found, request.GET.get("search")).features)


def _snapshot(found: Assessment, features: dict[str, Any] | None) -> Snapshot:
    if found.result is None or found.detail is None:
        raise Http404
    return Snapshot(found.result, found.detail, context_of(found), features)
