"""What is asked for on the pages of theories and curves."""

from typing import Any

from django import forms

from core.measurements.forms import UploadField
from core.measurements.models import Measurement
from core.revision import RevisionForm
from core.theories.models import Theory


class TheoryForm(forms.ModelForm):  # type: ignore[type-arg]
    """Words of a theory."""

    class Meta:
        model = Theory
        fields = ("name", "proposed_by", "description", "reference")
        labels = {"proposed_by": "Proposed by", "description": "What it says"}  # noqa: RUF012
        help_texts = {  # noqa: RUF012
            "name": "Short: it stands in tables and beside curves.",
            "proposed_by": "A person or a group.",
            "reference": "Where it is written down.",
        }


class EditTheoryForm(TheoryForm, RevisionForm):
    """Other words for a theory, and which state of them its reader saw."""


class CurveForm(forms.Form):
    """A curve to upload: the measurement that it predicts, the file, a note."""

    measurement = forms.ModelChoiceField(
        Measurement.objects.none(),
        label="Measurement",
        empty_label=None,
        help_text="What the curve predicts.",
    )
    table = UploadField(
        label="Curve",
        help_text="Text with two columns, x and y, on a grid of your own, in any order and without repeats. "
        "It must reach over the whole range of the data.",
    )
    note = forms.CharField(
        label="What is new in it", required=False, max_length=2000, widget=forms.Textarea(attrs={"rows": 3})
    )

    def __init__(self, theory: Theory, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        measurements = Measurement.objects.filter(collaboration=theory.collaboration)
        choice = self.fields["measurement"]
        assert isinstance(choice, forms.ModelChoiceField)
        choice.queryset = measurements


class SubmitBatchForm(forms.Form):
    """What its reader saw become of each curve of a batch: places and keys of theories, 0 for a new one."""

    seen = forms.RegexField(r"^[0-9]{1,9}:[0-9]{1,18}( [0-9]{1,9}:[0-9]{1,18})*$")

    def clean_seen(self) -> dict[int, int]:
        """By place the key of the theory."""
        pairs = (pair.split(":") for pair in self.cleaned_data["seen"].split())
        return {int(place): int(key) for place, key in pairs}


class BatchForm(forms.Form):
    """Many curves to upload for one measurement."""

    table = UploadField(
        label="Curves",
        help_text="A zip archive in which each file is a curve, text with two columns, and its name without the ending "
        "that of the theory; or one text table whose first column is x and every other column a curve, with the names "
        "of the theories in its first line. Up to 500 curves and 50 MB, unpacked.",
    )
    note = forms.CharField(
        label="What is new in them", required=False, max_length=2000, widget=forms.Textarea(attrs={"rows": 3})
    )
