"""Submit a draft curve: from then on it never changes and can be judged."""

from django.db import transaction
from django.db.models import Max
from django.utils import timezone

from core.errors import UserError
from core.theories.models import Curve, Theory


@transaction.atomic
def submit_curve(curve: Curve) -> Curve:
    """Give the draft its version and make it immutable."""
    # The theory's row is the lock: two who submit at once get one version after the other.
    theory = Theory.objects.select_for_update().get(pk=curve.theory_id)
    # Nor may the draft be discarded meanwhile.
    draft = Curve.objects.select_for_update().filter(pk=curve.pk, state=Curve.State.DRAFT).first()
    if draft is None:
        raise UserError("not-a-draft", "this curve is a draft no more", "Look at the theory's page")
    versions = theory.curves.filter(measurement=curve.measurement_id)
    draft.version = (versions.aggregate(last=Max("version"))["last"] or 0) + 1
    draft.state = Curve.State.SUBMITTED
    draft.submitted_at = timezone.now()
    draft.save(update_fields=["version", "state", "submitted_at"])
    return draft
