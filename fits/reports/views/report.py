"""The page of a report, and the links that share it."""

from typing import Any

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.db.models import QuerySet
from django.http import HttpResponse
from django.shortcuts import redirect, render
from django.urls import reverse
from django.views.decorators.cache import cache_control, never_cache
from django.views.decorators.http import require_GET, require_POST

from core.people.access import Action, load, may
from core.people.signed_in import SignedInRequest
from fits.reports.addresses import RouteAddresses
from fits.reports.files import chart_file, features_file, ranking_file, result_file
from fits.reports.forms import LinkForm
from fits.reports.models import Report, ShareLink
from fits.reports.page import result_page
from fits.reports.services import create_link, revoke_link
from fits.reports.snapshot import Snapshot


def with_place() -> QuerySet[Report]:
    """Reports with author and collaboration."""
    return Report.objects.select_related("collaboration", "author")


@login_required
@require_GET
def report(request: SignedInRequest, pk: int) -> HttpResponse:
    """The report; a lead sees its links as well."""
    found = load(with_place(), request.user, Action.VIEW, pk)
    return render(request, "reports/report.html", _context(request, found, LinkForm()))


@login_required
@require_POST
@never_cache
def new_link(request: SignedInRequest, pk: int) -> HttpResponse:
    """Make a link. Its secret is in this answer and nowhere else, so that this answer is no redirect."""
    found = load(with_place(), request.user, Action.REPORT, pk)
    form = LinkForm(request.POST)
    if not form.is_valid():
        return render(request, "reports/report.html", _context(request, found, form))
    made = create_link(
        user=request.user, report=found, label=form.cleaned_data["label"], expires_at=form.expires_at()
    )
    address = request.build_absolute_uri(reverse("reports:shared", args=[made.secret]))
    context = _context(request, found, LinkForm()) | {"new_address": address, "new_link": made.link}
    return render(request, "reports/report.html", context)


@login_required
@require_POST
def revoke(request: SignedInRequest, pk: int) -> HttpResponse:
    """Close a link."""
    link = load(ShareLink.objects.select_related("report__collaboration"), request.user, Action.REPORT, pk)
    revoke_link(link)
    messages.success(request, "The link is revoked: it opens nothing any more.")
    return redirect(link.report)


@login_required
@require_GET
@cache_control(private=True, max_age=86400)
def chart(request: SignedInRequest, pk: int, name: str, form: str) -> HttpResponse:
    """A chart of the report."""
    return chart_file(request, _snapshot(request, pk), name, form)


@login_required
@require_GET
def result_json(request: SignedInRequest, pk: int) -> HttpResponse:
    """The whole result."""
    return result_file(_snapshot(request, pk))


@login_required
@require_GET
def ranking_csv(request: SignedInRequest, pk: int) -> HttpResponse:
    """The ranking table."""
    return ranking_file(_snapshot(request, pk))


@login_required
@require_GET
def features(request: SignedInRequest, pk: int, name: str) -> HttpResponse:
    """A file of the features."""
    return features_file(request, _snapshot(request, pk), name)


def _snapshot(request: SignedInRequest, pk: int) -> Snapshot:
    return Snapshot.of(load(with_place(), request.user, Action.VIEW, pk).snapshot)


def _context(request: SignedInRequest, found: Report, form: LinkForm) -> dict[str, Any]:
    may_share = may(request.user, Action.REPORT, found.collaboration)
    page = result_page(
        Snapshot.of(found.snapshot),
        RouteAddresses("report", found.pk),
        level=request.GET.get("level"),
        curve=request.GET.get("curve"),
    )
    return page | {
        "report": found,
        "collaboration": found.collaboration,
        "may_share": may_share,
        "links": found.links.select_related("created_by") if may_share else [],
        "form": form,
    }
