"""What is asked for on the pages of reports."""

from datetime import datetime, timedelta
from typing import Any

from django import forms
from django.utils import timezone

from fits.reports.models import Report


class ReportForm(forms.ModelForm):  # type: ignore[type-arg]
    """Title and words of a report."""

    class Meta:
        model = Report
        fields = ("title", "words")
        labels = {"words": "Your words"}  # noqa: RUF012
        help_texts = {  # noqa: RUF012
            "words": "Plain text, shown above the result: what was asked, and what you make of the answer."
        }


class LinkForm(forms.Form):
    """A new share link."""

    label = forms.CharField(
        label="For whom",
        max_length=80,
        required=False,
        help_text="So that you know later which link to revoke.",
    )
    days = forms.TypedChoiceField(
        label="Open for",
        coerce=int,
        choices=(
            (7, "a week"),
            (30, "30 days"),
            (90, "90 days"),
            (365, "a year"),
            (0, "until it is revoked"),
        ),
        initial=30,
    )

    def expires_at(self) -> datetime | None:
        """The moment from which the link no longer opens the report."""
        days: Any = self.cleaned_data["days"]
        return timezone.now() + timedelta(days=days) if days else None
