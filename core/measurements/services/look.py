"""Look at sealed data before they are open: a lead may, and everybody can see who did."""

from django.db import transaction

from core.errors import UserError
from core.measurements.models import EarlyLook, Measurement
from core.people.log import Deed, record
from core.people.models import User


@transaction.atomic
def look_early(*, user: User, measurement: Measurement) -> None:
    """Show this lead the data from now on, and note that they saw them."""
    kept = Measurement.objects.select_for_update(no_key=True).get(pk=measurement.pk)
    if not kept.is_sealed:
        raise UserError("not-sealed", f"{kept} is not sealed: its data are open to all", "Look at its page")
    record_look(kept, user, EarlyLook.How.LOOKED)


def record_look(measurement: Measurement, user: User, how: EarlyLook.How) -> None:
    """Note somebody's first look at sealed data. To be called within the transaction that shows them."""
    look, is_first = EarlyLook.objects.get_or_create(
        measurement=measurement, user=user, defaults={"how": how}
    )
    if not is_first:
        return
    # Seen by all: that somebody saw the data tells nothing of what is in them.
    record(
        Deed.LOOKED_EARLY,
        who=user,
        collaboration=measurement.collaboration,
        about=measurement.name,
        url=measurement.get_absolute_url(),
        detail={"how": look.get_how_display()},
    )
