"""Ask for the features of an assessment, follow the search, cancel it."""

from django.contrib.auth.decorators import login_required
from django.http import Http404, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.cache import never_cache
from django.views.decorators.http import require_GET, require_POST

from core.people.access import Action, load
from core.people.forms import explain
from core.people.signed_in import SignedInRequest
from core.user_error import UserError
from fits.assessments.models import Assessment
from fits.assessments.services import cancel_features, request_features
from fits.reports.feature_searches import searches_of
from fits.reports.features.progress import progress_of
from fits.reports.forms import WindowsForm
from fits.reports.views.assessment import result_context, with_place


@login_required
@require_POST
def ask(request: SignedInRequest, pk: int) -> HttpResponse:
    """Seek features in these windows; what is wrong with them is said on the page of the result."""
    found = load(with_place(), request.user, Action.ASSESS, pk)
    if found.status != Assessment.Status.DONE:
        raise Http404
    form = WindowsForm(request.POST, assessment=found)
    if form.is_valid():
        try:
            search = request_features(
                user=request.user, assessment=found, windows=form.cleaned_data["windows"]
            )
        except UserError as error:
            explain(form, error)
        else:
            return redirect(f"{found.get_absolute_url()}?search={search.pk}#part-features")
    return render(request, "reports/assessment.html", result_context(request, found, form))


@login_required
@require_GET
@never_cache
def progress(request: SignedInRequest, pk: int) -> HttpResponse:
    """The part of the page that is fetched again and again; once the search has ended, the whole page is."""
    found = load(Assessment.objects.defer("detail"), request.user, Action.VIEW, pk)
    running = searches_of(found).running
    response = render(
        request, "reports/features/progress.html", {"assessment": found, "search": progress_of(running)}
    )
    if running is None:
        response["HX-Refresh"] = "true"
    return response


@login_required
@require_POST
def cancel(request: SignedInRequest, pk: int) -> HttpResponse:
    """Cancel the search that is under way."""
    found = load(Assessment.objects.defer("result", "detail"), request.user, Action.ASSESS, pk)
    if running := searches_of(found).running:
        cancel_features(running, by=request.user)
    return redirect(found)
