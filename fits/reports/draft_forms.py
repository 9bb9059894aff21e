"""What is asked for while a report is written."""

from collections.abc import Iterable, Sequence
from typing import Any

from django import forms

from core.revision import RevisionForm
from fits.assessments.models import Assessment
from fits.reports.models import Report, ReportPart

MARKDOWN = "Markdown: *emphasis*, lists, quotes, “#” for headings, [words](https://…) for a link. No images, no HTML."
# Markdown of nothing but brackets takes long to read, and longer the more there is of it.
MOST_CHARACTERS = 50_000


def _words(help_text: str, label: str = "Words") -> forms.CharField:
    return forms.CharField(
        label=label, required=False, max_length=MOST_CHARACTERS, widget=forms.Textarea, help_text=help_text
    )


class NewReportForm(forms.ModelForm):  # type: ignore[type-arg]
    """The title of a report that is begun."""

    class Meta:
        model = Report
        fields = ("title",)


class IntoReportForm(forms.Form):
    """Into which report an assessment comes: a new one, or a draft that is there."""

    into = forms.ModelChoiceField(
        queryset=Report.objects.none(), required=False, empty_label="a new report", label="Into"
    )
    title = forms.CharField(max_length=200, label="Title", required=False, help_text="Of a new report.")

    def __init__(self, *args: Any, drafts: Iterable[Report], **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["into"].queryset = drafts  # type: ignore[attr-defined]

    def clean(self) -> None:
        """A new one needs a title."""
        super().clean()
        if (
            not self.cleaned_data.get("into")
            and not self.cleaned_data.get("title")
            and "into" not in self.errors
        ):
            self.add_error("title", "A new report needs a title.")


class ReportWordsForm(RevisionForm, forms.ModelForm):  # type: ignore[type-arg]
    """Title and opening words of a draft."""

    words = _words(f"What was asked, and what you make of the answers. {MARKDOWN}", "Opening words")

    class Meta:
        model = Report
        fields = ("title", "words")


class PartForm(RevisionForm, forms.ModelForm):  # type: ignore[type-arg]
    """Heading and words of a part, and which of the theories that were judged it shows."""

    words = _words(MARKDOWN)
    shown = forms.MultipleChoiceField(
        label="Shown",
        widget=forms.CheckboxSelectMultiple,
        required=False,
        error_messages={"required": "Show at least one."},
        help_text="What is not shown is taken out of all charts, tables and files when the report is frozen; ranks "
        "stay those among all, and the report says how many there are.",
    )

    class Meta:
        model = ReportPart
        fields = ("heading", "words", "shown")
        help_texts = {  # noqa: RUF012
            "heading": "Without one, an assessment is headed by measurement and release.",
        }

    def __init__(self, *args: Any, names: Sequence[str], **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.names = names
        if len(names) < 2:
            # Nothing can be left out.
            del self.fields["shown"]
            return
        field = self.fields["shown"]
        assert isinstance(field, forms.MultipleChoiceField)
        field.choices = [(name, name) for name in names]
        field.required = True
        self.initial["shown"] = names if self.instance.shown is None else self.instance.shown

    def clean_shown(self) -> list[str] | None:
        """None for all."""
        shown: list[str] = self.cleaned_data["shown"]
        return None if set(shown) == set(self.names) else shown


class SeenForm(forms.Form):
    """The revision that somebody saw of what they change by a button."""

    seen = forms.IntegerField(min_value=0, widget=forms.HiddenInput)


class MoveForm(SeenForm):
    """Up or down."""

    to = forms.ChoiceField(choices=(("up", "up"), ("down", "down")))


class AddPartForm(SeenForm):
    """What comes in as the last part: one of the assessments, or words."""

    assessment = forms.ModelChoiceField(
        queryset=Assessment.objects.none(), required=False, empty_label="words alone", label="Add"
    )

    def __init__(self, *args: Any, assessments: Iterable[Assessment], **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["assessment"].queryset = assessments  # type: ignore[attr-defined]
        self.fields["assessment"].label_from_instance = _named  # type: ignore[attr-defined]


def _named(assessment: Assessment) -> str:
    release = assessment.release
    state = ", withdrawn" if release.is_withdrawn else ""
    return f"{release.measurement}, {release}{state}: {assessment} of {assessment.created_at:%-d %B %Y}"
