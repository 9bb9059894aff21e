"""What is asked for by talk: the words of a comment, and which entries of the log."""

from datetime import datetime, time, timedelta
from typing import Any

from django import forms
from django.core.exceptions import ValidationError
from django.db.models import QuerySet
from django.utils import timezone

from core.people.log import Deed
from core.people.models import LogEntry, User
from fits.talk.words import MOST_LETTERS


class CommentForm(forms.Form):
    """A comment."""

    words = forms.CharField(
        label="Your comment",
        max_length=MOST_LETTERS,
        widget=forms.Textarea(attrs={"rows": 4}),
        help_text="Plain text; addresses that begin with https:// become links. “@” with a name mentions "
        "somebody: the next e-mail of what is new tells them, if they have these e-mails sent.",
    )


class LogFilter(forms.Form):
    """Which entries of the log are wanted. Every field may be left open."""

    who = forms.ModelChoiceField(User.objects.none(), required=False, empty_label="everybody")
    what = forms.ChoiceField(required=False)
    since = forms.DateField(
        label="From", required=False, widget=forms.DateInput(attrs={"type": "date"}, format="%Y-%m-%d")
    )
    until = forms.DateField(
        label="To", required=False, widget=forms.DateInput(attrs={"type": "date"}, format="%Y-%m-%d")
    )
    text = forms.CharField(label="About", required=False, max_length=100)

    def __init__(self, data: Any, *, people: QuerySet[User]) -> None:
        super().__init__(data, label_suffix="")
        who, what = self.fields["who"], self.fields["what"]
        assert isinstance(who, forms.ModelChoiceField)
        assert isinstance(what, forms.ChoiceField)
        who.queryset = people
        what.choices = [("", "everything"), *((deed.name.lower(), deed.value) for deed in Deed)]

    def clean(self) -> dict[str, Any]:
        """Refuse a stretch of time that ends before it begins."""
        cleaned = super().clean() or {}
        since, until = cleaned.get("since"), cleaned.get("until")
        if since and until and until < since:
            self.add_error("until", ValidationError("This is before the first day.", code="order"))
        return cleaned

    def narrow(self, entries: QuerySet[LogEntry]) -> QuerySet[LogEntry]:
        """Those of the entries that are wanted. Days are those of the site's time zone."""
        wanted = self.cleaned_data
        if wanted["who"]:
            entries = entries.filter(who=wanted["who"])
        if wanted["what"]:
            entries = entries.filter(deed=wanted["what"])
        if wanted["since"]:
            entries = entries.filter(at__gte=_midnight(wanted["since"]))
        if wanted["until"]:
            entries = entries.filter(at__lt=_midnight(wanted["until"] + timedelta(days=1)))
        if wanted["text"]:
            entries = entries.filter(about__icontains=wanted["text"])
        return entries


def _midnight(day: Any) -> datetime:
    return timezone.make_aware(datetime.combine(day, time()))
