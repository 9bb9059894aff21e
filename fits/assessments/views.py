"""Start an assessment, follow it, cancel it."""

from django.contrib.auth.decorators import login_required
from django.http import Http404, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.cache import never_cache
from django.views.decorators.http import require_GET, require_http_methods, require_POST

from core.measurements.models import Release
from core.people.access import Action, load
from core.people.forms import explain
from core.people.signed_in import SignedInRequest
from core.user_error import UserError
from fits.assessments.coordinates_form import CoordinatesForm
from fits.assessments.desk_choice import desk_choice
from fits.assessments.forms import AssessmentForm
from fits.assessments.models import Assessment
from fits.assessments.services import cancel_assessment, request_assessment
from fits.assessments.stages import stages_of


@login_required
@require_http_methods(["GET", "POST"])
def new_assessment(request: SignedInRequest, pk: int) -> HttpResponse:
    """Choose curves and settings for a release."""
    release = _release_to_assess(request, pk)
    choice = desk_choice(request.user, release, request.GET.get("desk", ""))
    form = AssessmentForm(request.POST or None, release=release, curves=choice.curves)
    if form.is_valid():
        try:
            return redirect(
                request_assessment(
                    user=request.user,
                    release=release,
                    curves=form.cleaned_data["curves"],
                    settings=form.chosen_settings(),
                    seed=form.cleaned_data["seed"],
                )
            )
        except UserError as error:
            explain(form, error)
    context = {
        "form": form,
        "choice": choice,
        "counted": form if form.is_bound else CoordinatesForm.with_defaults(release),
        "release": release,
        "measurement": release.measurement,
        "collaboration": release.measurement.collaboration,
    }
    return render(request, "assessments/new.html", context)


@login_required
@require_GET
def coordinates(request: SignedInRequest, pk: int) -> HttpResponse:
    """What the resolution chosen so far comes to, or why it is refused; fetched while it is chosen."""
    form = CoordinatesForm(request.GET, release=_release_to_assess(request, pk))
    return render(request, "assessments/coordinates.html", {"counted": form, "faults": form.errors.values()})


def _release_to_assess(request: SignedInRequest, pk: int) -> Release:
    releases = Release.objects.select_related("measurement__collaboration").defer("table", "lines")
    release = load(releases, request.user, Action.ASSESS, pk)
    if release.state != Release.State.PUBLISHED:
        raise Http404
    return release


@login_required
@require_GET
@never_cache
def progress(request: SignedInRequest, pk: int) -> HttpResponse:
    """The part of the page that is fetched again and again; once it has ended, the whole page is."""
    assessment = load(Assessment.objects.defer("result", "detail"), request.user, Action.VIEW, pk)
    response = render(
        request, "assessments/progress_part.html", {"assessment": assessment, "stages": stages_of(assessment)}
    )
    if assessment.has_ended:
        response["HX-Refresh"] = "true"
    return response


@login_required
@require_POST
def cancel(request: SignedInRequest, pk: int) -> HttpResponse:
    """Cancel what has not ended."""
    assessment = load(Assessment.objects.defer("result", "detail"), request.user, Action.ASSESS, pk)
    cancel_assessment(assessment, by=request.user)
    return redirect(assessment)
