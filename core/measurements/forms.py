"""What is asked for on the pages of measurements and releases."""

from typing import Any

from django import forms
from django.conf import settings
from django.core.files import File

from core.measurements.models import Measurement, Release
from core.measurements.reading.limits import MAXIMUM_HEADER_LENGTH
from core.measurements.reading.roles import SHARED, UNUSED
from core.measurements.said_of_errors import SENTENCES, SaidOfErrors
from core.measurements.services.locked_draft import reading_of
from core.measurements.stored_release import said_of
from core.revision import RevisionForm

SHARED_CHOICE = "shared"
ROLE_CHOICES = (
    (UNUSED, "not used"),
    ("x", "x"),
    ("y", "y"),
    ("error", "error of y"),
    ("lo", "lower edge of the bin"),
    ("hi", "upper edge of the bin"),
    (SHARED_CHOICE, "shared error"),
)


class UploadField(forms.FileField):
    """A file that is weighed before any of it is read."""

    def __init__(self, **kwargs: Any) -> None:
        limit = {"data-limit": settings.UPLOAD_MAX_BYTES}
        super().__init__(widget=forms.ClearableFileInput(attrs=limit), max_length=255, **kwargs)

    def to_python(self, data: "File[Any] | None") -> "File[Any] | None":
        """Refuse what is too large."""
        file = super().to_python(data)
        if file is not None and (file.size or 0) > settings.UPLOAD_MAX_BYTES:
            megabytes = settings.UPLOAD_MAX_BYTES // (1024 * 1024)
            raise forms.ValidationError(f"The file is larger than {megabytes} MB. Thin the table.")
        return file


class MeasurementForm(forms.ModelForm):  # type: ignore[type-arg]
    """Words and axis of a measurement."""

    class Meta:
        model = Measurement
        fields = ("name", "about", "x_name", "x_unit", "y_name", "y_unit", "axis")
        labels = {"about": "What is measured, and how", "axis": "Axis of x"}  # noqa: RUF012
        help_texts = {  # noqa: RUF012
            "name": "For example: surface seiche power against frequency.",
            "x_name": "For example: frequency.",
            "x_unit": "For example: cycles per hour.",
            "axis": "What the resolution is even on. Linear: a feature is as wide, in units of x, wherever it stands. "
            "Logarithmic: it spans the same ratio of x, as in spectra over decades; every x must be above 0. "
            "It is settled with the first release.",
        }


class EditMeasurementForm(MeasurementForm, RevisionForm):
    """Other words for a measurement, and which state of them its reader saw."""


class ErrorsField(forms.ChoiceField):
    """Where the errors come from. Without a choice it is what it was."""

    def clean(self, value: Any) -> Any:
        """What was chosen, else what is shown as chosen."""
        return super().clean(value or self.initial)


def errors_field(has_covariance: bool | None = None) -> ErrorsField:
    """Where the errors come from; whether there is a covariance is not known yet, or narrows the choice."""
    left_out = {None: (), True: (SaidOfErrors.COLUMN,), False: (SaidOfErrors.COVARIANCE,)}[has_covariance]
    return ErrorsField(
        label="Where the errors come from",
        choices=[(said.value, words) for said, words in SENTENCES.items() if said not in left_out],
        widget=forms.RadioSelect,
        initial=SaidOfErrors.COLUMN.value,
    )


def calibration_field() -> forms.FloatField:
    """How well the scale of y is known, in percent."""
    return forms.FloatField(
        label="Scale known to, in %",
        required=False,
        min_value=0.0,
        validators=[_below_100],
        widget=forms.NumberInput(attrs={"step": "any"}),
        help_text="A common factor on all of y that is known only so well, as the gain of an instrument. It is taken "
        "of each curve that is judged, never of the data. Empty: exact.",
        error_messages={"invalid": "Give a number, as 5 for 5 %."},
    )


def _below_100(percent: float) -> None:
    if not percent < 100.0:
        raise forms.ValidationError("Give less than 100 %.")


class SaidForm(forms.Form):
    """What forms that speak of errors have in common; their fields are `errors_from` and `scale_percent`."""

    @property
    def said(self) -> SaidOfErrors:
        """Where the errors come from."""
        return SaidOfErrors(self.cleaned_data["errors_from"])

    @property
    def calibration(self) -> float:
        """As a fraction."""
        return float(self.cleaned_data["scale_percent"] or 0.0) / 100.0


class UploadForm(SaidForm):
    """A data table, what is to be said of its errors, and the files that go with it."""

    table = UploadField(
        label="Data table",
        help_text="Text with columns x, y and error (lo and hi for bins, shared:name for a shared error), separated "
        "by commas, semicolons, "
        "tabs or blanks; lines that start with # are skipped. Up to 50 MB and a million rows.",
    )
    errors_from = errors_field()
    scale_percent = calibration_field()
    covariance = UploadField(
        label="Covariance",
        required=False,
        help_text="n × n numbers as .npy or text, where errors are correlated. It replaces the error column.",
    )
    windows = UploadField(
        label="Windows",
        required=False,
        help_text="Where each point sees a weighted stretch of the curve: numbers as .npy or text, the first row the "
        "x of a grid, then a row of weights on it for each point.",
    )
    note = forms.CharField(
        label="What is new in it", required=False, max_length=2000, widget=forms.Textarea(attrs={"rows": 3})
    )

    @property
    def has_more(self) -> bool:
        """Whether the fields that few need are to be seen: they were used, or a fault lies in them."""
        return self.is_bound and (
            any(name in self.errors for name in ("covariance", "scale_percent", "windows"))
            or bool(self.data.get("scale_percent"))
        )

    def clean(self) -> dict[str, Any]:
        """A covariance that is spoken of must be there; a file that is there speaks for itself."""
        cleaned = super().clean() or self.cleaned_data
        has_file = bool(cleaned.get("covariance"))
        if (
            cleaned.get("errors_from") == SaidOfErrors.COVARIANCE
            and not has_file
            and "covariance" not in self.errors
        ):
            self.add_error("covariance", "Choose the file that holds it.")
        if cleaned.get("errors_from") == SaidOfErrors.COLUMN and has_file:
            cleaned["errors_from"] = SaidOfErrors.COVARIANCE.value
        return cleaned


class ColumnsForm(SaidForm):
    """What each column of a draft is, and where its errors come from. `seen`: the reading that its reader saw."""

    seen = forms.CharField(required=False, widget=forms.HiddenInput)

    def __init__(self, release: Release, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.release = release
        self.fields["seen"].initial = reading_of(release)
        has_covariance = release.variances is not None
        self.fields["errors_from"] = errors_field(has_covariance)
        self.fields["errors_from"].initial = said_of(release).value
        self.fields["scale_percent"] = calibration_field()
        self.fields["scale_percent"].initial = (
            f"{100.0 * release.calibration:.10g}" if release.calibration else None
        )
        for index, column in enumerate(release.columns):
            title = column["header"] or f"column {index + 1}"
            is_shared = column["role"].startswith(SHARED)
            self.fields[f"role_{index}"] = forms.ChoiceField(
                choices=ROLE_CHOICES,
                required=False,
                initial=SHARED_CHOICE if is_shared else column["role"],
                label=title,
                widget=forms.Select(
                    attrs={"aria-label": f"What {title} is", "data-names": f"id_shared_{index}"}
                ),
            )
            self.fields[f"shared_{index}"] = forms.CharField(
                required=False,
                max_length=MAXIMUM_HEADER_LENGTH,
                initial=column["role"].removeprefix(SHARED) if is_shared else title,
                widget=forms.TextInput(
                    attrs={"aria-label": f"Name of the shared error in {title}", "placeholder": "its name"}
                ),
            )

    @property
    def pairs(self) -> list[tuple[forms.BoundField, forms.BoundField]]:
        """For each column the field of its role and that of its shared error's name."""
        return [(self[f"role_{i}"], self[f"shared_{i}"]) for i in range(len(self.release.columns))]

    @property
    def roles(self) -> list[str]:
        """The roles chosen, once the form is valid."""
        return [self._role(index) for index in range(len(self.release.columns))]

    def _role(self, index: int) -> str:
        role: str = self.cleaned_data[f"role_{index}"]
        if role != SHARED_CHOICE:
            return role
        return SHARED + (self.cleaned_data[f"shared_{index}"] or f"column {index + 1}")
