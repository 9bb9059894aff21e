"""Pages on which many curves are uploaded together, looked at and submitted."""

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.http import Http404, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods, require_POST, require_safe

from core.errors import UserError
from core.measurements.models import Measurement
from core.measurements.preview_figure import plotly_json
from core.people.access import Action, desk_of, load, seen_by
from core.people.signed_in import SignedInRequest
from core.theories import services
from core.theories.batch_page import batch_page
from core.theories.forms import BatchForm, SubmitBatchForm
from core.theories.models import Batch


@login_required
@require_http_methods(["GET", "POST"])
def new_batch(request: SignedInRequest, pk: int) -> HttpResponse:
    """Upload many curves for a measurement; what can be taken apart becomes a batch to look at."""
    rows = Measurement.objects.select_related("collaboration")
    measurement = load(rows, request.user, Action.SUBMIT, pk)
    form = BatchForm(request.POST or None, request.FILES or None)
    fault = None
    if form.is_valid():
        file = form.cleaned_data["table"]
        try:
            batch = services.draft_batch(
                user=request.user,
                measurement=measurement,
                content=file.read(),
                file_name=file.name,
                note=form.cleaned_data["note"],
            )
        except UserError as error:
            fault = error
        else:
            return redirect(batch)
    waiting = Batch.objects.filter(measurement=measurement, uploaded_by=request.user, submitted_at=None)
    context = {
        "form": form,
        "fault": fault,
        "measurement": measurement,
        "collaboration": measurement.collaboration,
        "desk": desk_of(request.user, measurement.collaboration),
        "waiting": seen_by(waiting, request.user).select_related("measurement"),
    }
    return render(request, "theories/new_batch.html", context, status=400 if fault or form.errors else 200)


@login_required
@require_safe
def batch(request: SignedInRequest, pk: int) -> HttpResponse:
    """Each curve as accepted or refused, and what was submitted of them."""
    row = _batch(request, pk, Action.VIEW)
    page = batch_page(row, request.user)
    context = {
        "batch": row,
        "measurement": row.measurement,
        "collaboration": row.collaboration,
        "page": page,
        "figure": None if page.figure is None else plotly_json(page.figure),
    }
    return render(request, "theories/batch.html", context)


@login_required
@require_POST
def submit_batch(request: SignedInRequest, pk: int) -> HttpResponse:
    """Submit the accepted curves."""
    row = _batch(request, pk, Action.SUBMIT)
    form = SubmitBatchForm(request.POST)
    if not form.is_valid():
        raise UserError(
            "not-seen", "it does not say what you saw", "Submit the curves from the page that lists them"
        )
    before = row.items.filter(refusal_code="").count()
    submitted = services.submit_batch(row, seen=form.cleaned_data["seen"])
    count = submitted.items.filter(refusal_code="").count()
    if count:
        messages.success(request, f"{_curves(count)} {'is' if count == 1 else 'are'} submitted.")
    if before > count:
        messages.warning(
            request,
            f"{_curves(before - count)} could no more be accepted; the reason stands beside each below.",
        )
    return redirect(submitted)


@login_required
@require_POST
def discard_batch(request: SignedInRequest, pk: int) -> HttpResponse:
    """Throw the batch away."""
    row = _batch(request, pk, Action.SUBMIT)
    services.discard_batch(row)
    messages.success(request, "The upload is gone.")
    return redirect(row.measurement)


def _curves(count: int) -> str:
    return f"{count} curve{'' if count == 1 else 's'}"


def _batch(request: SignedInRequest, pk: int, action: Action) -> Batch:
    """The batch; until it is submitted it is there for who uploaded it alone."""
    rows = Batch.objects.select_related("collaboration", "measurement", "uploaded_by", "desk")
    row = load(rows, request.user, action, pk)
    if row.uploaded_by_id != request.user.pk and (row.submitted_at is None or action is not Action.VIEW):
        raise Http404
    return row
