"""What is asked for on the pages of people."""

from datetime import datetime, timedelta
from typing import Any

from django import forms
from django.contrib.auth.password_validation import validate_password
from django.utils import timezone

from core.errors import UserError
from core.people.models import Collaboration, DigestPace, Invitation, Role, User
from core.revision import RevisionForm


def explain(form: forms.BaseForm, error: UserError, field: str | None = None) -> None:
    """Put a service's refusal on the form, beside the field that it is about."""
    remedy = f" {error.remedy}." if error.remedy else ""
    form.add_error(field, f"{error.reason[:1].upper()}{error.reason[1:]}.{remedy}")


class CollaborationForm(forms.ModelForm):  # type: ignore[type-arg]
    """Name and description of a collaboration."""

    class Meta:
        model = Collaboration
        fields = ("name", "about")
        labels = {"about": "What it is about"}  # noqa: RUF012
        help_texts = {"name": "A survey, a group or a lab class."}  # noqa: RUF012


class CollaborationWordsForm(RevisionForm, CollaborationForm):
    """Other words for a collaboration."""


class InvitationForm(forms.Form):
    """What is asked of every invitation."""

    role = forms.ChoiceField(choices=Role.choices, initial=Role.MEMBER)
    days = forms.TypedChoiceField(
        label="Open for", coerce=int, choices=((1, "a day"), (7, "a week"), (30, "a month")), initial=7
    )

    def expires_at(self) -> datetime:
        """The moment from which nobody joins by it."""
        days: int = self.cleaned_data["days"]
        return timezone.now() + timedelta(days=days)


class LinkInvitationForm(InvitationForm):
    """A link that a lead hands on."""

    label = forms.CharField(
        label="For whom",
        max_length=80,
        required=False,
        help_text="So that you know later which link to revoke. Members and observers read it in the log.",
    )
    is_for_many = forms.BooleanField(
        label="For many",
        required=False,
        help_text="As for a class: whoever has the link can join until it closes. Without it the link works once.",
    )
    field_order = ("label", "role", "days", "is_for_many")


class MailInvitationForm(InvitationForm):
    """An address to send a link to."""

    email = forms.EmailField(
        label="E-mail address", max_length=254, widget=forms.EmailInput(attrs={"autocomplete": "off"})
    )
    field_order = ("email", "role", "days")


class RoleForm(forms.Form):
    """Another role for someone; one such form stands in each row of the list, and tells which role was seen there."""

    role = forms.ChoiceField(choices=Role.choices)
    seen = forms.CharField(widget=forms.HiddenInput)

    def __init__(self, *args: Any, person: str = "", **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["role"].widget.attrs["aria-label"] = f"Role of {person}"


class HandOverForm(forms.Form):
    """Whose role was seen when the lead was handed to them."""

    seen = forms.CharField(widget=forms.HiddenInput)


class NewcomerForm(forms.Form):
    """An account for whoever comes by an invitation."""

    email = forms.EmailField(
        label="E-mail address",
        max_length=254,
        help_text="You sign in with it.",
        widget=forms.EmailInput(attrs={"autocomplete": "username"}),
    )
    name = forms.CharField(
        max_length=120,
        help_text="As others here will read it.",
        widget=forms.TextInput(attrs={"autocomplete": "name"}),
    )
    password = forms.CharField(
        strip=False,
        widget=forms.PasswordInput(attrs={"autocomplete": "new-password"}),
        help_text="At least ten characters, not numbers alone.",
    )
    again = forms.CharField(
        label="Password, once more",
        strip=False,
        widget=forms.PasswordInput(attrs={"autocomplete": "new-password"}),
    )

    def __init__(self, *args: Any, invitation: Invitation, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        if invitation.email:
            # Whatever is sent with the form: the account is for the address that the invitation went to.
            field = self.fields["email"]
            field.initial, field.disabled = invitation.email, True
            field.help_text = "The invitation is for this address; you sign in with it."

    def clean(self) -> None:
        """Hold the password to the rules of all passwords."""
        super().clean()
        given = self.cleaned_data
        password = given.get("password")
        if not password:
            return
        try:
            validate_password(password, User(email=given.get("email", ""), name=given.get("name", "")))
        except forms.ValidationError as error:
            self.add_error("password", error)
        if "again" in given and given["again"] != password:
            self.add_error("again", "The two passwords differ.")


class PreferencesForm(forms.Form):
    """What someone wants for themselves."""

    name = forms.CharField(
        max_length=120,
        help_text="As others read it.",
        widget=forms.TextInput(attrs={"autocomplete": "name"}),
    )
    digest = forms.ChoiceField(
        label="E-mail of what is new",
        choices=DigestPace.choices,
        help_text="Releases, verdicts, reports and comments in your collaborations since the last one. "
        "Nothing new, no e-mail.",
    )
