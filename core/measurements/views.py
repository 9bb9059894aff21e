"""Pages on which measurements are named and releases uploaded, looked at and published."""

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.http import HttpResponse, StreamingHttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods, require_POST, require_safe

from core.errors import UserError
from core.measurements import services
from core.measurements.export import csv_lines
from core.measurements.forms import ColumnsForm, EditMeasurementForm, MeasurementForm, UploadForm
from core.measurements.models import Measurement, Release
from core.measurements.preview_figure import plotly_json
from core.measurements.release_page import release_page
from core.measurements.seal_page import seal_of
from core.measurements.services.locked_draft import reading_of
from core.measurements.stored_release import table_of
from core.people.access import Action, load, may, require
from core.people.forms import explain
from core.people.models import Collaboration
from core.people.signed_in import SignedInRequest
from core.revision import CHANGED_MEANWHILE


@login_required
@require_http_methods(["GET", "POST"])
def new_measurement(request: SignedInRequest, pk: int) -> HttpResponse:
    """Name a quantity that is measured."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.PUBLISH, pk)
    form = MeasurementForm(request.POST or None)
    if form.is_valid():
        try:
            measurement = services.create_measurement(
                user=request.user, collaboration=collaboration, **form.cleaned_data
            )
        except UserError as error:
            explain(form, error, "name")
        else:
            return redirect(measurement)
    context = {"form": form, "collaboration": collaboration}
    return render(request, "measurements/measurement_form.html", context)


@login_required
@require_http_methods(["GET", "POST"])
def edit_measurement(request: SignedInRequest, pk: int) -> HttpResponse:
    """Change a measurement's words."""
    measurement = _measurement(request, pk)
    kept = {name: getattr(measurement, name) for name in MeasurementForm.Meta.fields}
    form = EditMeasurementForm(request.POST or None, initial=kept | {"revision": measurement.revision})
    if form.is_valid():
        words = dict(form.cleaned_data)
        try:
            services.edit_measurement(
                user=request.user, measurement=measurement, seen=words.pop("revision"), **words
            )
        except UserError as error:
            explain(form, error, {"axis-settled": "axis", "name-taken": "name"}.get(error.code))
            measurement.refresh_from_db()
            if error.code == CHANGED_MEANWHILE:
                form.show_what_stands_now(measurement)
        else:
            return redirect(measurement)
    context = {"form": form, "collaboration": measurement.collaboration, "measurement": measurement}
    return render(request, "measurements/measurement_form.html", context)


@login_required
@require_http_methods(["GET", "POST"])
def upload(request: SignedInRequest, pk: int) -> HttpResponse:
    """Upload a data table; what can be read becomes a draft."""
    measurement = _measurement(request, pk)
    form = UploadForm(request.POST or None, request.FILES or None)
    fault = None
    if form.is_valid():
        table, covariance, windows = (form.cleaned_data[name] for name in ("table", "covariance", "windows"))
        try:
            release = services.draft_release(
                user=request.user,
                measurement=measurement,
                content=table.read(),
                file_name=table.name,
                said=form.said,
                calibration=form.calibration,
                covariance_content=covariance.read() if covariance else None,
                covariance_name=covariance.name if covariance else "",
                windows_content=windows.read() if windows else None,
                windows_name=windows.name if windows else "",
                note=form.cleaned_data["note"],
            )
        except UserError as error:
            fault = error
        else:
            return redirect(release)
    context = {
        "form": form,
        "fault": fault,
        "measurement": measurement,
        "collaboration": measurement.collaboration,
        "seal": seal_of(measurement, request.user),
    }
    return render(request, "measurements/upload.html", context, status=400 if fault or form.errors else 200)


@login_required
@require_http_methods(["GET", "POST"])
def release(request: SignedInRequest, pk: int) -> HttpResponse:
    """A draft to check and map, or a published release to read. Posting maps a draft's columns."""
    row = _release(request, pk, Action.PUBLISH if request.method == "POST" else Action.VIEW)
    if row.state != Release.State.DRAFT:
        return redirect(row) if request.method == "POST" else _show(request, row, "measurements/release.html")
    form = ColumnsForm(row, request.POST or None)
    fault = None
    if form.is_valid():
        try:
            services.map_columns(
                row,
                form.roles,
                user=request.user,
                said=form.said,
                calibration=form.calibration,
                seen=form.cleaned_data["seen"] or None,
            )
        except UserError as error:
            fault = error
            if error.code == CHANGED_MEANWHILE:
                # As it is read now, in the form as in all else.
                row = _release(request, pk, Action.PUBLISH)
                form = ColumnsForm(row)
        else:
            return redirect(row)
    return _show(request, row, "measurements/draft.html", form=form, fault=fault)


@login_required
@require_POST
def publish(request: SignedInRequest, pk: int) -> HttpResponse:
    """Publish a draft."""
    published = services.publish_release(
        _release(request, pk, Action.PUBLISH), request.user, seen=request.POST.get("seen") or None
    )
    messages.success(request, f"Release {published.number} is published.")
    return redirect(published)


@login_required
@require_POST
def discard(request: SignedInRequest, pk: int) -> HttpResponse:
    """Throw a draft away."""
    row = _release(request, pk, Action.PUBLISH)
    services.discard_release(row, request.user, seen=request.POST.get("seen") or None)
    messages.success(request, "The draft is gone.")
    return redirect(row.measurement)


@login_required
@require_safe
def download(request: SignedInRequest, pk: int) -> StreamingHttpResponse:
    """The table as CSV."""
    row = _release(request, pk, Action.VIEW)
    table = table_of(row)
    name = f"release-{row.number}.csv" if row.number else "draft.csv"
    return StreamingHttpResponse(
        csv_lines(table.titles, table.values),
        content_type="text/csv; charset=utf-8",
        headers={"Content-Disposition": f'attachment; filename="{name}"'},
    )


def _measurement(request: SignedInRequest, pk: int) -> Measurement:
    rows = Measurement.objects.select_related("collaboration")
    return load(rows, request.user, Action.PUBLISH, pk)


def _release(request: SignedInRequest, pk: int, action: Action) -> Release:
    """The release; a draft is for those alone who may publish it."""
    rows = Release.objects.select_related("measurement__collaboration", "created_by", "withdrawn_by")
    row = load(rows, request.user, action, pk)
    if row.state == Release.State.DRAFT:
        require(request.user, Action.PUBLISH, row.measurement.collaboration)
    return row


def _show(
    request: SignedInRequest,
    row: Release,
    template: str,
    *,
    form: ColumnsForm | None = None,
    fault: UserError | None = None,
) -> HttpResponse:
    page = release_page(row)
    collaboration = row.measurement.collaboration
    context = {
        "release": row,
        "measurement": row.measurement,
        "collaboration": collaboration,
        "page": page,
        "figure": plotly_json(page.figure) if page.figure else None,
        "form": form,
        "fault": fault,
        "reading": reading_of(row),
        "seal": seal_of(row.measurement, request.user),
        "may_assess": may(request.user, Action.ASSESS, collaboration) and not row.is_withdrawn,
        "may_withdraw": may(request.user, Action.PUBLISH, collaboration) and not row.is_withdrawn,
    }
    return render(request, template, context, status=400 if fault else 200)
