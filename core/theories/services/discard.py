"""Throw a draft curve away."""

from django.db import transaction

from core.errors import UserError
from core.theories.models import Curve


@transaction.atomic
def discard_curve(curve: Curve) -> None:
    """Delete the draft."""
    deleted, _ = Curve.objects.filter(pk=curve.pk, state=Curve.State.DRAFT).delete()
    if not deleted:
        raise UserError("not-a-draft", "a submitted curve stays", "Submit a correction as a new version")
