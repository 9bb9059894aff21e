"""What is asked for on the pages of measurements and releases."""

from typing import Any

from django import forms
from django.conf import settings
from django.core.files import File

from core.measurements.models import Measurement, Release
from core.measurements.reading.limits import MAXIMUM_HEADER_LENGTH
from core.measurements.reading.roles import SHARED, UNUSED

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
            "axis": "What the resolution is even on. It is settled with the first release.",
        }


class UploadForm(forms.Form):
    """A data table, and a covariance where there is one."""

    table = UploadField(
        label="Data table",
        help_text="Text with columns x, y and error (or lo and hi for bins), separated by commas, semicolons, "
        "tabs or blanks; lines that start with # are skipped. Up to 50 MB and a million rows.",
    )
    covariance = UploadField(
        label="Covariance",
        required=False,
        help_text="n × n numbers as .npy or text, where errors are correlated. It replaces the error column.",
    )
    note = forms.CharField(
        label="What is new in it", required=False, max_length=2000, widget=forms.Textarea(attrs={"rows": 3})
    )


class ColumnsForm(forms.Form):
    """What each column of a draft is."""

    def __init__(self, release: Release, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.release = release
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
