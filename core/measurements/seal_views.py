"""Pages on which a measurement is sealed, looked at early and opened, and a release withdrawn."""

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.http import Http404, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods, require_POST

from core.errors import UserError
from core.measurements import services
from core.measurements.models import Measurement, Release
from core.measurements.seal_form import SealForm, WithdrawForm
from core.measurements.seal_page import seal_of
from core.measurements.seal_terms import SealTerms
from core.people.access import Action, load
from core.people.forms import explain
from core.people.signed_in import SignedInRequest
from core.revision import CHANGED_MEANWHILE


@login_required
@require_http_methods(["GET", "POST"])
def seal(request: SignedInRequest, pk: int) -> HttpResponse:
    """Seal a measurement, or change the terms of its seal."""
    measurement = _measurement(request, pk)
    kept = vars(SealTerms.of(measurement)) | {"revision": measurement.revision}
    form = SealForm(request.POST or None, initial=kept)
    if form.is_valid():
        change = services.change_seal if measurement.was_sealed else services.seal_measurement
        try:
            change(
                user=request.user,
                measurement=measurement,
                seen=form.cleaned_data["revision"],
                terms=form.terms,
            )
        except UserError as error:
            form.explain(error)
            if error.code == CHANGED_MEANWHILE:
                form.show_what_stands_now(measurement)
        else:
            messages.success(request, f"{measurement} is sealed.")
            return redirect(measurement)
    page = seal_of(measurement, request.user)
    context = _place(measurement) | {"form": form, "seal": page, "is_new": not measurement.was_sealed}
    return render(request, "measurements/seal.html", context)


@login_required
@require_http_methods(["GET", "POST"])
def open_(request: SignedInRequest, pk: int) -> HttpResponse:
    """Ask whether to open a sealed measurement, and do so."""
    measurement = _measurement(request, pk)
    if request.method == "POST":
        services.open_measurement(user=request.user, measurement=measurement)
        messages.success(request, f"{measurement} is open.")
        return redirect(measurement)
    context = _place(measurement) | {"seal": seal_of(measurement, request.user)}
    return render(request, "measurements/open.html", context)


@login_required
@require_POST
def look(request: SignedInRequest, pk: int) -> HttpResponse:
    """Show a lead sealed data from now on, which is noted for all to see."""
    measurement = _measurement(request, pk)
    services.look_early(user=request.user, measurement=measurement)
    return redirect(measurement)


@login_required
@require_http_methods(["GET", "POST"])
def withdraw(request: SignedInRequest, pk: int) -> HttpResponse:
    """Withdraw a release, with the reason."""
    releases = Release.objects.select_related("measurement__collaboration").defer("table", "lines")
    release = load(releases, request.user, Action.PUBLISH, pk)
    if release.state == Release.State.DRAFT:
        raise Http404
    form = WithdrawForm(request.POST or None)
    if form.is_valid():
        try:
            services.withdraw_release(user=request.user, release=release, reason=form.cleaned_data["reason"])
        except UserError as error:
            explain(form, error)
        else:
            messages.success(request, f"{str(release).capitalize()} is withdrawn.")
            return redirect(release)
    context = _place(release.measurement) | {"form": form, "release": release}
    return render(request, "measurements/withdraw.html", context)


def _measurement(request: SignedInRequest, pk: int) -> Measurement:
    rows = Measurement.objects.select_related("collaboration", "opened_by")
    return load(rows, request.user, Action.SEAL, pk)


def _place(measurement: Measurement) -> dict[str, object]:
    return {"measurement": measurement, "collaboration": measurement.collaboration}
