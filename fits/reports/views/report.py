"""The page of a report, its files, and the links that share it."""

from typing import Any

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.http import HttpResponse
from django.shortcuts import redirect, render
from django.urls import reverse
from django.utils.cache import patch_cache_control
from django.views.decorators.cache import never_cache
from django.views.decorators.debug import sensitive_post_parameters
from django.views.decorators.http import require_GET, require_POST

from core.people.access import PERMITTED, Action, load, may, role_of
from core.people.models import Collaboration
from core.people.signed_in import SignedInRequest
from fits.reports.files import chart_file, features_file, ranking_file, result_file
from fits.reports.forms import LinkForm
from fits.reports.models import Report, ShareLink
from fits.reports.readable import load_readable, readable, with_place
from fits.reports.report_context import report_context, snapshot_asked_for
from fits.reports.services import create_link, revoke_link
from fits.reports.views.draft import draft_page


@login_required
@require_GET
def reports(request: SignedInRequest, pk: int) -> HttpResponse:
    """All reports of a collaboration; leads see the drafts as well."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.READ_REPORTS, pk)
    role = role_of(request.user, collaboration)
    found = readable(Report.objects.select_related("author"), collaboration, role)
    rows = list(found.only("title", "state", "created_at", "frozen_at", "author__name", "author__email"))
    context = {
        "collaboration": collaboration,
        "drafts": [row for row in rows if not row.is_frozen],
        "frozen": [row for row in rows if row.is_frozen],
        "may_report": role in PERMITTED[Action.REPORT],
    }
    return render(request, "reports/reports.html", context)


@login_required
@require_GET
def report(request: SignedInRequest, pk: int) -> HttpResponse:
    """The report; a lead sees its links as well. A draft is shown to leads, to be written at."""
    found = load_readable(request.user, pk)
    if not found.is_frozen:
        return draft_page(request, found)
    return render(request, "reports/report.html", _context(request, found, LinkForm()))


@login_required
@require_POST
@never_cache
@sensitive_post_parameters("passphrase")
def new_link(request: SignedInRequest, pk: int) -> HttpResponse:
    """Make a link. Its secret is in this answer and nowhere else, so that this answer is no redirect."""
    found = load(with_place(), request.user, Action.REPORT, pk)
    form = LinkForm(request.POST)
    if not found.is_frozen:
        return redirect(found)
    if not form.is_valid():
        return render(request, "reports/report.html", _context(request, found, form))
    made = create_link(
        user=request.user,
        report=found,
        label=form.cleaned_data["label"],
        expires_at=form.expires_at(),
        passphrase=form.cleaned_data["passphrase"],
    )
    address = request.build_absolute_uri(reverse("reports:shared", args=[made.secret]))
    context = _context(request, found, LinkForm()) | {"new_address": address, "new_link": made.link}
    return render(request, "reports/report.html", context)


@login_required
@require_POST
def revoke(request: SignedInRequest, pk: int) -> HttpResponse:
    """Close a link."""
    link = load(ShareLink.objects.select_related("report__collaboration"), request.user, Action.REPORT, pk)
    revoke_link(link, by=request.user)
    messages.success(request, "The link is revoked: it opens nothing any more.")
    return redirect(link.report)


@login_required
@require_GET
def chart(request: SignedInRequest, pk: int, name: str, form: str) -> HttpResponse:
    """A chart of the report."""
    found = load_readable(request.user, pk)
    response = chart_file(request, snapshot_asked_for(request, found), name, form)
    if found.is_frozen:
        patch_cache_control(response, private=True, max_age=86400)
    return response


@login_required
@require_GET
def result_json(request: SignedInRequest, pk: int) -> HttpResponse:
    """The whole result."""
    return result_file(snapshot_asked_for(request, load_readable(request.user, pk)))


@login_required
@require_GET
def ranking_csv(request: SignedInRequest, pk: int) -> HttpResponse:
    """The ranking table."""
    return ranking_file(snapshot_asked_for(request, load_readable(request.user, pk)))


@login_required
@require_GET
def features(request: SignedInRequest, pk: int, name: str) -> HttpResponse:
    """A file of the features."""
    return features_file(request, snapshot_asked_for(request, load_readable(request.user, pk)), name)


def _context(request: SignedInRequest, found: Report, form: LinkForm) -> dict[str, Any]:
    may_share = may(request.user, Action.REPORT, found.collaboration)
    return report_context(request, found, "report", found.pk) | {
        "collaboration": found.collaboration,
        "may_share": may_share,
        "links": found.links.select_related("created_by") if may_share else [],
        "form": form,
        "is_member": True,
    }
