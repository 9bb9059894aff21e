"""Two people who change the same words at once: the second is told, and loses nothing of either."""

from collections.abc import Collection
from typing import Any

from django import forms
from django.db.models import F, Model

from core.user_error import UserError

CHANGED_MEANWHILE = "changed-meanwhile"


def save_if_current(row: Model, *, seen: int, fields: Collection[str]) -> None:
    """Save these fields of the row, unless somebody has saved it since its revision `seen`.

    Raises UserError `changed-meanwhile` then; nothing is saved.
    """
    values = {name: getattr(row, name) for name in fields}
    same = type(row)._default_manager.filter(pk=row.pk, revision=seen)
    if not same.update(**values, revision=F("revision") + 1):
        raise UserError(
            CHANGED_MEANWHILE,
            "somebody else has changed this since you opened it",
            "What you wrote is still here: compare it with what stands now, and save again to replace that",
        )
    row.refresh_from_db(fields=["revision"])


class RevisionForm(forms.Form):
    """Carries the revision that its reader saw. To be mixed into forms that change words."""

    revision = forms.IntegerField(widget=forms.HiddenInput)

    def show_what_stands_now(self, row: Model) -> None:
        """After `changed-meanwhile`: say beside each field what somebody else made of it, and let the next save, made
        knowing that, replace it."""
        row.refresh_from_db()
        data: Any = self.data.copy()  # type: ignore[attr-defined]
        data[self.add_prefix("revision")] = str(row.revision)  # type: ignore[attr-defined]
        self.data = data
        for name in self.fields:
            if name == "revision" or not hasattr(row, name):
                continue
            now = getattr(row, name)
            if now != self.cleaned_data.get(name):
                self.add_error(name, f"Now stands here: “{now}”." if now else "Now stands empty.")
