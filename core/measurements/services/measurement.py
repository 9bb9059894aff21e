"""Add a measurement or change its words."""

from django.db import IntegrityError, transaction

from core.errors import UserError
from core.measurements.models import Axis, Measurement, Release
from core.people.log import Deed, record
from core.people.models import Collaboration, User
from core.people.services.rules import lock
from core.revision import save_if_current

WORDS = ("name", "about", "x_name", "x_unit", "y_name", "y_unit", "axis")


@transaction.atomic
def create_measurement(
    *,
    user: User,
    collaboration: Collaboration,
    name: str,
    about: str = "",
    x_name: str,
    x_unit: str = "",
    y_name: str,
    y_unit: str = "",
    axis: str = Axis.LINEAR,
) -> Measurement:
    """A new measurement, without releases."""
    measurement = Measurement(
        collaboration=collaboration,
        name=name,
        about=about,
        x_name=x_name,
        x_unit=x_unit,
        y_name=y_name,
        y_unit=y_unit,
        axis=axis,
        created_by=user,
    )
    try:
        with transaction.atomic():
            measurement.save()
    except IntegrityError as error:
        _refuse_taken(measurement, error)
    record(
        Deed.ADDED_MEASUREMENT,
        who=user,
        collaboration=collaboration,
        about=measurement.name,
        url=measurement.get_absolute_url(),
    )
    return measurement


@transaction.atomic
def edit_measurement(
    *,
    user: User,
    measurement: Measurement,
    seen: int,
    name: str,
    about: str,
    x_name: str,
    x_unit: str,
    y_name: str,
    y_unit: str,
    axis: str,
) -> None:
    """Other words for it, unless somebody has changed them since revision `seen`. Its axis is settled once a release
    is published, as verdicts rest on it, and while it is sealed, as curves are made for it."""
    # Of two who swap the names of two measurements at once, each would wait for the other.
    lock(measurement.collaboration)
    # Whoever publishes at this moment holds the same lock.
    kept = Measurement.objects.select_for_update(no_key=True).get(pk=measurement.pk)
    if axis != kept.axis:
        _refuse_settled(kept)
    before = {word: getattr(kept, word) for word in WORDS}
    kept.name, kept.about, kept.axis = name, about, axis
    kept.x_name, kept.x_unit = x_name, x_unit
    kept.y_name, kept.y_unit = y_name, y_unit
    try:
        with transaction.atomic():
            save_if_current(kept, seen=seen, fields=WORDS)
    except IntegrityError as error:
        _refuse_taken(kept, error)
    record(
        Deed.EDITED_MEASUREMENT,
        who=user,
        collaboration=kept.collaboration,
        about=kept.name,
        url=kept.get_absolute_url(),
        detail={
            word: f"{before[word] or '–'} → {getattr(kept, word) or '–'}"
            for word in WORDS
            if before[word] != getattr(kept, word)
        },
    )
    measurement.refresh_from_db()


def _refuse_settled(kept: Measurement) -> None:
    # While it is sealed, whether anything is published is nobody's to learn.
    if kept.is_sealed:
        raise UserError("axis-settled", "the measurement is sealed", "Wait until it is open")
    if kept.releases.exclude(state=Release.State.DRAFT).exists():
        raise UserError(
            "axis-settled", "a release is published already", "Add a new measurement for another axis"
        )


def _refuse_taken(measurement: Measurement, error: IntegrityError) -> None:
    same = Measurement.objects.filter(collaboration=measurement.collaboration, name=measurement.name)
    if not same.exclude(pk=measurement.pk).exists():
        raise error
    reason = f"a measurement named “{measurement.name}” is here already"
    raise UserError("name-taken", reason, "Choose another name") from error
