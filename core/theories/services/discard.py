"""Throw a draft curve away."""

from django.db import transaction

from core.errors import UserError
from core.theories.models import Curve


@transaction.atomic
def discard_curve(curve: Curve) -> None:
    """Delete the draft."""
    # Django deletes by key what it has looked up before: without the lock it may have been submitted meanwhile.
    # By its key: in the order of their theories, these would be locked with it, and after it.
    drafts = Curve.objects.select_for_update().filter(pk=curve.pk, state=Curve.State.DRAFT).order_by("pk")
    if not drafts.values_list("pk", flat=True).first():
        raise UserError("not-a-draft", "a submitted curve stays", "Submit a correction as a new version")
    Curve.objects.filter(pk=curve.pk).delete()
