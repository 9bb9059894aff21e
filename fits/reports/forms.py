"""What is asked for on the pages of results and of frozen reports."""

import math
import re
from datetime import datetime, timedelta
from typing import Any

from django import forms
from django.utils import timezone

from fits.assessments.models import Assessment


class WindowsForm(forms.Form):
    """Windows in which one peak or dip each is sought."""

    windows = forms.CharField(
        label="Windows",
        required=False,
        widget=forms.Textarea(attrs={"rows": 4, "spellcheck": "false", "data-windows": ""}),
        help_text="One a line, as “0.4 to 1.1”: each is the stretch of x in which one peak and one dip are sought. "
        "Without any, those between the fit’s own dips are taken.",
    )

    def __init__(self, *args: Any, assessment: Assessment, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        field = self.fields["windows"]
        if unit := assessment.release.measurement.x_unit:
            field.label = f"Windows, in {unit}"
        # What is picked on the chart is kept within the data.
        x = (assessment.result or {})["fit"]["x"]
        field.widget.attrs |= {"data-low": repr(x[0]), "data-high": repr(x[-1])}

    def clean_windows(self) -> list[tuple[float, float]]:
        """Pairs of numbers; every line that is none is named."""
        windows, faults = [], []
        for number, line in enumerate(self.cleaned_data["windows"].splitlines(), start=1):
            if not line.strip():
                continue
            ends = _ends(line)
            if ends is None:
                faults.append(
                    f"Line {number}: “{line.strip()[:40]}” is not two numbers with “to” between them."
                )
            else:
                windows.append(ends)
        if faults:
            raise forms.ValidationError(faults)
        return windows


def _ends(line: str) -> tuple[float, float] | None:
    parts = [part for part in re.split(r"\s*(?:\bto\b|[:;,–]|\s)\s*", line.strip()) if part]
    try:
        low, high = (float(part.replace("−", "-")) for part in parts)
    except ValueError:
        return None
    return (low, high) if math.isfinite(low) and math.isfinite(high) else None


class LinkForm(forms.Form):
    """A new share link."""

    label = forms.CharField(
        label="For whom",
        max_length=80,
        required=False,
        help_text="So that you know later which link to revoke. Members read it in the log.",
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
    passphrase = forms.CharField(
        min_length=8,
        max_length=200,
        required=False,
        strip=False,
        help_text="Asked for when the link is opened. At least eight characters; tell it by another way than the link. "
        "It cannot be looked up later.",
        widget=forms.PasswordInput(attrs={"autocomplete": "new-password"}),
    )

    def expires_at(self) -> datetime | None:
        """The moment from which the link no longer opens the report."""
        days: Any = self.cleaned_data["days"]
        return timezone.now() + timedelta(days=days) if days else None


class PassphraseForm(forms.Form):
    """What opens a link that is not open to all who hold it."""

    passphrase = forms.CharField(
        max_length=200, strip=False, widget=forms.PasswordInput(attrs={"autocomplete": "current-password"})
    )
