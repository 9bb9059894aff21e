"""What is asked for on the page of a seal."""

from datetime import UTC
from typing import Any

from django import forms
from django.utils import timezone

from core.measurements.seal_terms import SealTerms
from core.people.forms import explain
from core.revision import RevisionForm
from core.user_error import UserError

# The field that a service's refusal is about.
FIELD_OF = {
    "opening-past": "opens_at",
    "deadline-past": "curves_until",
    "deadline-passed": "curves_until",
    "curves-after-opening": "curves_until",
    "half-a-range": "announced_x_max",
    "range-turned": "announced_x_min",
    "range-relied-on": "announced_x_min",
    "wider-than-announced": "announced_x_min",
}


class UtcField(forms.DateTimeField):
    """A moment to the minute, given and shown in UTC wherever its reader is."""

    def __init__(self, **kwargs: Any) -> None:
        widget = forms.DateTimeInput(attrs={"type": "datetime-local"}, format="%Y-%m-%dT%H:%M")
        super().__init__(widget=widget, required=False, **kwargs)

    def prepare_value(self, value: Any) -> Any:
        """In UTC."""
        with timezone.override(UTC):
            return super().prepare_value(value)

    def to_python(self, value: Any) -> Any:
        """What was given is in UTC."""
        with timezone.override(UTC):
            return super().to_python(value)


class SealForm(RevisionForm):
    """The terms of a seal; all of them may be left open."""

    opens_at = UtcField(
        label="Opens at (UTC)",
        help_text="From that minute on everybody sees data and verdicts. Empty: a lead opens it by a button.",
    )
    curves_until = UtcField(
        label="Curves until (UTC)",
        help_text="From then until it opens no curve is taken and none replaced. Empty: until it opens.",
    )
    announced_x_min = forms.FloatField(
        label="Announced x, from", required=False, widget=forms.NumberInput(attrs={"step": "any"})
    )
    announced_x_max = forms.FloatField(
        label="Announced x, to",
        required=False,
        widget=forms.NumberInput(attrs={"step": "any"}),
        help_text="Curves have to cover it, and the data may not reach further. Better not left empty: a curve that "
        "falls short of the data cannot be judged.",
    )

    @property
    def terms(self) -> SealTerms:
        """As given."""
        fields = ("opens_at", "curves_until", "announced_x_min", "announced_x_max")
        return SealTerms(**{name: self.cleaned_data[name] for name in fields})

    def explain(self, error: UserError) -> None:
        """Put a refusal beside the field that it is about."""
        explain(self, error, FIELD_OF.get(error.code))


class WithdrawForm(forms.Form):
    """Why a release is withdrawn."""

    reason = forms.CharField(
        label="What is wrong with it",
        max_length=2000,
        widget=forms.Textarea(attrs={"rows": 3}),
        help_text="Everybody who reads the release, or an assessment of it, reads this.",
    )
