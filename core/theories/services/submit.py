"""Submit a draft curve: from then on it never changes and can be judged."""

from django.db import transaction
from django.db.models import Max
from django.utils import timezone

from core.errors import UserError
from core.measurements.models import Measurement
from core.people.log import Deed, record
from core.people.models import LogEntry
from core.theories.models import Curve, Theory
from core.theories.rules import refuse_closed, refuse_short


@transaction.atomic
def submit_curve(curve: Curve) -> Curve:
    """Give the draft its version and make it immutable. It is done by who uploaded it."""
    # The measurement's row is the lock of its seal, and the theory's that of its versions: two who submit at once
    # get one version after the other.
    measurement = Measurement.objects.select_for_update(no_key=True).get(pk=curve.measurement_id)
    theory = Theory.objects.select_for_update().get(pk=curve.theory_id)
    # Nor may the draft be discarded meanwhile.
    drafts = Curve.objects.select_for_update().filter(pk=curve.pk, state=Curve.State.DRAFT)
    draft = drafts.order_by("pk").first()
    if draft is None:
        raise UserError("not-a-draft", "this curve is a draft no more", "Look at the theory's page")
    # Taken before the deadline is looked at, so that no curve that is taken bears a later time.
    draft.submitted_at = timezone.now()
    refuse_closed(measurement)
    refuse_short(measurement, draft.x_min, draft.x_max)
    versions = theory.curves.filter(measurement=measurement)
    draft.version = (versions.aggregate(last=Max("version"))["last"] or 0) + 1
    draft.state = Curve.State.SUBMITTED
    draft.save(update_fields=["version", "state", "submitted_at"])
    record_submission(draft)
    return draft


def record_submission(curve: Curve, into: list[LogEntry] | None = None) -> None:
    """Write into the log who submitted which version, and its hash."""
    theory = curve.theory
    record(
        Deed.SUBMITTED,
        who=curve.submitted_by,
        collaboration=theory.collaboration,
        about=f"{curve}, for {curve.measurement}",
        url=curve.get_absolute_url(),
        detail={"version": curve.version, "sha256": curve.file_sha256},
        desk=theory.desk,
        into=into,
    )
