"""A report for whoever holds its link, signed in or not, and knows its passphrase where it has one."""

from collections.abc import Callable
from functools import wraps
from typing import Any

from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.debug import sensitive_post_parameters
from django.views.decorators.http import require_http_methods, require_safe

from core.errors import UserError
from core.people.access import Action, may
from core.people.forms import explain
from fits.reports.files import chart_file, features_file, ranking_file, result_file
from fits.reports.forms import PassphraseForm
from fits.reports.models import ShareLink
from fits.reports.passphrases import is_unlocked, remember
from fits.reports.report_context import report_context, snapshot_asked_for
from fits.reports.services import count_opening, try_passphrase
from fits.reports.services.create_link import hashed
from fits.reports.views.printed import pdf_or_waiting, waiting_part

View = Callable[..., HttpResponse]


def behind_a_link(view: View) -> View:
    """Gives the view an open link.

    A link that is unknown, expired or revoked gets one and the same answer. Nothing of an answer is kept or
    indexed, and the address, which is the secret, is not told to other sites.
    """

    @wraps(view)
    def guarded(request: HttpRequest, token: str, **rest: Any) -> HttpResponse:
        links = ShareLink.objects.select_related(
            "report__collaboration", "report__author", "report__previous"
        )
        link = links.filter(token_sha256=hashed(token)).first()
        try:
            if link is None or not link.is_open:
                raise Http404
            response = view(request, link, token, **rest)
        except Http404:
            # Also for a file that the report does not have: its address holds the secret too.
            response = render(request, "reports/shared_missing.html", status=404)
        response.headers.setdefault("Referrer-Policy", "no-referrer")
        response["X-Robots-Tag"] = "noindex, nofollow"
        response["Cache-Control"] = "no-store"
        return response

    return guarded


def unlocked(view: View) -> View:
    """Asks for the passphrase first, where the link has one."""

    @wraps(view)
    def guarded(request: HttpRequest, link: ShareLink, token: str, **rest: Any) -> HttpResponse:
        if not is_unlocked(request, link):
            return _ask(request, token, PassphraseForm(), status=403)
        return view(request, link, token, **rest)

    return guarded


@require_http_methods(["GET", "HEAD", "POST"])
@sensitive_post_parameters("passphrase")
@behind_a_link
def shared(request: HttpRequest, link: ShareLink, token: str) -> HttpResponse:
    """The report, or the question for its passphrase."""
    if request.method == "POST":
        return _unlock(request, link, token)
    if not is_unlocked(request, link):
        return _ask(request, token, PassphraseForm())
    # Further pages, levels and files of it are not counted, nor what its own leads read.
    if (
        request.method == "GET"
        and not request.GET
        and not may(request.user, Action.REPORT, link.report.collaboration)
    ):
        count_opening(link)
    context = report_context(request, link.report, "shared", token)
    return render(request, "reports/shared.html", context | {"token": token})


def _unlock(request: HttpRequest, link: ShareLink, token: str) -> HttpResponse:
    form = PassphraseForm(request.POST)
    if not link.passphrase:
        return redirect("reports:shared", token)
    if form.is_valid():
        try:
            try_passphrase(link, form.cleaned_data["passphrase"])
        except UserError as error:
            explain(form, error, "passphrase")
        else:
            response = redirect("reports:shared", token)
            remember(response, link, token, is_secure=request.is_secure())
            return response
    return _ask(request, token, form, status=400)


def _ask(request: HttpRequest, token: str, form: PassphraseForm, *, status: int = 200) -> HttpResponse:
    response = render(request, "reports/shared_locked.html", {"form": form, "token": token}, status=status)
    # Other sites learn this one's name at most, which its own form needs.
    response["Referrer-Policy"] = "strict-origin"
    return response


@require_safe
@behind_a_link
@unlocked
def chart(request: HttpRequest, link: ShareLink, token: str, *, name: str, form: str) -> HttpResponse:
    """A chart of the report."""
    return chart_file(request, snapshot_asked_for(request, link.report), name, form)


@require_safe
@behind_a_link
@unlocked
def result_json(request: HttpRequest, link: ShareLink, token: str) -> HttpResponse:
    """The whole result."""
    return result_file(snapshot_asked_for(request, link.report))


@require_safe
@behind_a_link
@unlocked
def ranking_csv(request: HttpRequest, link: ShareLink, token: str) -> HttpResponse:
    """The ranking table."""
    return ranking_file(snapshot_asked_for(request, link.report))


@require_safe
@behind_a_link
@unlocked
def features(request: HttpRequest, link: ShareLink, token: str, *, name: str) -> HttpResponse:
    """A file of the features."""
    return features_file(request, snapshot_asked_for(request, link.report), name)


@require_safe
@behind_a_link
@unlocked
def printed(request: HttpRequest, link: ShareLink, token: str, *, paper: str) -> HttpResponse:
    """The report as a PDF."""
    return pdf_or_waiting(request, link.report, paper, is_shared=True)


@require_safe
@behind_a_link
@unlocked
def print_progress(request: HttpRequest, link: ShareLink, token: str, *, paper: str) -> HttpResponse:
    """Whether it is made."""
    return waiting_part(request, link.report, paper)
