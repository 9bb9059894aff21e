"""Reports on paper: the PDF, or a page that waits for it."""

from django.contrib.auth.decorators import login_required
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.cache import never_cache
from django.views.decorators.http import require_GET, require_http_methods

from core.people.access import Action, may, require
from core.people.signed_in import SignedInRequest
from fits.reports.models import Paper, Printing, Report
from fits.reports.readable import load_readable
from fits.reports.services import ask_printing, print_again


@login_required
@require_http_methods(["GET", "POST"])
@never_cache
def printed(request: SignedInRequest, pk: int, paper: str) -> HttpResponse:
    """The PDF; a lead may have one made again that failed."""
    found = load_readable(request.user, pk)
    if request.method == "POST":
        require(request.user, Action.REPORT, found.collaboration)
        print_again(printing_of(found, paper))
        return redirect(request.path)
    may_repeat = may(request.user, Action.REPORT, found.collaboration)
    return pdf_or_waiting(request, found, paper, may_repeat=may_repeat)


@login_required
@require_GET
@never_cache
def progress(request: SignedInRequest, pk: int, paper: str) -> HttpResponse:
    """The part of the waiting page that is fetched again and again."""
    return waiting_part(request, load_readable(request.user, pk), paper)


def printing_of(report: Report, paper: str) -> Printing:
    """The print of a frozen report, asked for where there is none yet."""
    if paper not in Paper.values or not report.is_frozen:
        raise Http404
    return ask_printing(report, Paper(paper))


def pdf_or_waiting(
    request: HttpRequest, report: Report, paper: str, *, may_repeat: bool = False, is_shared: bool = False
) -> HttpResponse:
    """The PDF once it is made; until then, a page that waits for it."""
    printing = printing_of(report, paper)
    if printing.status == Printing.Status.DONE and printing.pdf:
        response = HttpResponse(bytes(printing.pdf), content_type="application/pdf")
        response["Content-Disposition"] = f'inline; filename="report-{printing.paper}.pdf"'
        return response
    context = {
        "report": report,
        "printing": printing,
        "progress_address": f"{request.path}/progress",
        "may_repeat": may_repeat,
        "base": "reports/shared_base.html" if is_shared else "base.html",
    }
    return render(request, "reports/printing.html", context)


def waiting_part(request: HttpRequest, report: Report, paper: str) -> HttpResponse:
    """How far along it is; at its end the whole page is fetched, which is the PDF then."""
    printing = printing_of(report, paper)
    context = {"printing": printing, "progress_address": request.path}
    response = render(request, "reports/printing_progress.html", context)
    if printing.has_ended:
        response["HX-Refresh"] = "true"
    return response
