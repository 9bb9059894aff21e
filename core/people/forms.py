"""What is asked for on the pages of people."""

from typing import Any

from django import forms

from core.errors import UserError
from core.people.models import Collaboration, Role


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


class MemberForm(forms.Form):
    """Someone to add."""

    email = forms.EmailField(
        label="E-mail address",
        help_text="An address that is new here gets an e-mail with a link to set a password.",
        widget=forms.EmailInput(attrs={"autocomplete": "off"}),
    )
    name = forms.CharField(
        label="Name", max_length=120, required=False, help_text="For an address that is new here."
    )
    role = forms.ChoiceField(choices=Role.choices, initial=Role.MEMBER)


class RoleForm(forms.Form):
    """Another role for someone; one such form stands in each row of the list."""

    role = forms.ChoiceField(choices=Role.choices)

    def __init__(self, *args: Any, person: str = "", **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["role"].widget.attrs["aria-label"] = f"Role of {person}"
