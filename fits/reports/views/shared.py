"""A report for whoever holds its link, signed in or not."""

from collections.abc import Callable
from functools import wraps
from typing import Any

from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.views.decorators.http import require_safe

from fits.reports.addresses import RouteAddresses
from fits.reports.files import chart_file, features_file, ranking_file, result_file
from fits.reports.models import Report, ShareLink
from fits.reports.page import result_page
from fits.reports.services.create_link import hashed
from fits.reports.snapshot import Snapshot

View = Callable[..., HttpResponse]


def behind_a_link(view: Callable[..., HttpResponse]) -> View:
    """Gives the view the report of an open link.

    A link that is unknown, expired or revoked gets one and the same answer. Nothing of an answer is kept or
    indexed, and the address, which is the secret, is not told to other sites.
    """

    @require_safe
    @wraps(view)
    def guarded(request: HttpRequest, token: str, **rest: Any) -> HttpResponse:
        link = (
            ShareLink.objects.select_related("report__collaboration", "report__author")
            .filter(token_sha256=hashed(token))
            .first()
        )
        try:
            if link is None or not link.is_open:
                raise Http404
            response = view(request, link.report, token, **rest)
        except Http404:
            # Also for a file that the report does not have: its address holds the secret too.
            response = render(request, "reports/shared_missing.html", status=404)
        response["Referrer-Policy"] = "no-referrer"
        response["X-Robots-Tag"] = "noindex, nofollow"
        response["Cache-Control"] = "no-store"
        return response

    return guarded


@behind_a_link
def shared(request: HttpRequest, report: Report, token: str) -> HttpResponse:
    """The report."""
    page = result_page(
        Snapshot.of(report.snapshot),
        RouteAddresses("shared", token),
        level=request.GET.get("level"),
        curve=request.GET.get("curve"),
    )
    return render(request, "reports/shared.html", page | {"report": report})


@behind_a_link
def chart(request: HttpRequest, report: Report, token: str, *, name: str, form: str) -> HttpResponse:
    """A chart of the report."""
    return chart_file(request, Snapshot.of(report.snapshot), name, form)


@behind_a_link
def result_json(request: HttpRequest, report: Report, token: str) -> HttpResponse:
    """The whole result."""
    return result_file(Snapshot.of(report.snapshot))


@behind_a_link
def ranking_csv(request: HttpRequest, report: Report, token: str) -> HttpResponse:
    """The ranking table."""
    return ranking_file(Snapshot.of(report.snapshot))


@behind_a_link
def features(request: HttpRequest, report: Report, token: str, *, name: str) -> HttpResponse:
    """A file of the features."""
    return features_file(request, Snapshot.of(report.snapshot), name)
