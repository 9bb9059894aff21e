"""Pages on which theories are named and curves uploaded, looked at and submitted."""

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.core.exceptions import PermissionDenied
from django.http import Http404, HttpResponse, StreamingHttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods, require_POST, require_safe

from core.errors import UserError
from core.measurements.export import csv_lines
from core.measurements.preview_figure import plotly_json
from core.measurements.reading.stored import from_bytes
from core.people.access import Action, desk_of, load, may
from core.people.forms import explain
from core.people.models import Collaboration
from core.people.signed_in import SignedInRequest
from core.revision import CHANGED_MEANWHILE
from core.theories import services
from core.theories.curve_page import curve_page
from core.theories.forms import CurveForm, EditTheoryForm, TheoryForm
from core.theories.models import Curve, Theory


@login_required
@require_http_methods(["GET", "POST"])
def new_theory(request: SignedInRequest, pk: int) -> HttpResponse:
    """Name a theory."""
    collaboration = load(Collaboration.objects.all(), request.user, Action.SUBMIT, pk)
    form = TheoryForm(request.POST or None)
    if form.is_valid():
        try:
            theory = services.create_theory(
                user=request.user, collaboration=collaboration, **form.cleaned_data
            )
        except UserError as error:
            explain(form, error, "name")
        else:
            return redirect(theory)
    context = {
        "form": form,
        "collaboration": collaboration,
        "desk": desk_of(request.user, collaboration),
    }
    return render(request, "theories/theory_form.html", context)


@login_required
@require_http_methods(["GET", "POST"])
def edit_theory(request: SignedInRequest, pk: int) -> HttpResponse:
    """Change a theory's words: for who submitted it and for leads."""
    theory = _theory(request, pk)
    if theory.submitted_by_id != request.user.pk and not may(
        request.user, Action.MANAGE, theory.collaboration
    ):
        raise PermissionDenied("only who submitted a theory, or a lead, may change its words")
    kept = {name: getattr(theory, name) for name in TheoryForm.Meta.fields}
    form = EditTheoryForm(request.POST or None, initial=kept | {"revision": theory.revision})
    if form.is_valid():
        words = dict(form.cleaned_data)
        try:
            services.edit_theory(by=request.user, theory=theory, seen=words.pop("revision"), **words)
        except UserError as error:
            explain(form, error, "name" if error.code == "name-taken" else None)
            theory.refresh_from_db()
            if error.code == CHANGED_MEANWHILE:
                form.show_what_stands_now(theory)
        else:
            return redirect(theory)
    context = {"form": form, "collaboration": theory.collaboration, "theory": theory}
    return render(request, "theories/theory_form.html", context)


@login_required
@require_http_methods(["GET", "POST"])
def new_curve(request: SignedInRequest, pk: int) -> HttpResponse:
    """Upload a curve; what can be read becomes a draft."""
    theory = _theory(request, pk)
    asked_for = {"measurement": request.GET.get("measurement")}
    form = CurveForm(theory, request.POST or None, request.FILES or None, initial=asked_for)
    fault = None
    if form.is_valid():
        file = form.cleaned_data["table"]
        try:
            draft = services.draft_curve(
                user=request.user,
                theory=theory,
                measurement=form.cleaned_data["measurement"],
                content=file.read(),
                file_name=file.name,
                note=form.cleaned_data["note"],
            )
        except UserError as error:
            fault = error
        else:
            return redirect(draft)
    context = {"form": form, "fault": fault, "theory": theory, "collaboration": theory.collaboration}
    return render(request, "theories/new_curve.html", context, status=400 if fault or form.errors else 200)


@login_required
@require_safe
def curve(request: SignedInRequest, pk: int) -> HttpResponse:
    """The curve over the newest data; a draft to submit or discard."""
    row = _curve(request, pk, Action.VIEW)
    page = curve_page(row, request.user)
    context = {
        "curve": row,
        "theory": row.theory,
        "measurement": row.measurement,
        "collaboration": row.theory.collaboration,
        "page": page,
        "figure": plotly_json(page.figure),
        "is_draft": row.state == Curve.State.DRAFT,
    }
    return render(request, "theories/curve.html", context)


@login_required
@require_POST
def submit(request: SignedInRequest, pk: int) -> HttpResponse:
    """Submit a draft."""
    submitted = services.submit_curve(_curve(request, pk, Action.SUBMIT))
    messages.success(request, f"Version {submitted.version} is submitted.")
    return redirect(submitted)


@login_required
@require_POST
def discard(request: SignedInRequest, pk: int) -> HttpResponse:
    """Throw a draft away."""
    row = _curve(request, pk, Action.SUBMIT)
    services.discard_curve(row)
    messages.success(request, "The draft is gone.")
    return redirect(row.theory)


@login_required
@require_safe
def download(request: SignedInRequest, pk: int) -> StreamingHttpResponse:
    """The curve as CSV."""
    row = _curve(request, pk, Action.VIEW)
    name = f"curve-version-{row.version}.csv" if row.version else "draft.csv"
    return StreamingHttpResponse(
        csv_lines(("x", "y"), from_bytes(row.table)),
        content_type="text/csv; charset=utf-8",
        headers={"Content-Disposition": f'attachment; filename="{name}"'},
    )


def _theory(request: SignedInRequest, pk: int) -> Theory:
    rows = Theory.objects.select_related("collaboration")
    return load(rows, request.user, Action.SUBMIT, pk)


def _curve(request: SignedInRequest, pk: int, action: Action) -> Curve:
    """The curve; a draft is there for who uploaded it alone."""
    rows = Curve.objects.select_related("theory__collaboration", "measurement", "submitted_by")
    row = load(rows, request.user, action, pk)
    if row.state == Curve.State.DRAFT and row.submitted_by_id != request.user.pk:
        raise Http404
    return row
