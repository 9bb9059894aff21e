"""Add a measurement or change its words."""

from django.db import IntegrityError, transaction

from core.errors import UserError
from core.measurements.models import Axis, Measurement, Release
from core.people.models import Collaboration, User


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
    _save(measurement)
    return measurement


@transaction.atomic
def edit_measurement(
    *,
    measurement: Measurement,
    name: str,
    about: str,
    x_name: str,
    x_unit: str,
    y_name: str,
    y_unit: str,
    axis: str,
) -> None:
    """Other words for it. Its axis is settled once a release is published: verdicts rest on it."""
    # Whoever publishes at this moment holds the same lock.
    kept = Measurement.objects.select_for_update().get(pk=measurement.pk)
    if axis != kept.axis and measurement.releases.filter(state=Release.State.PUBLISHED).exists():
        raise UserError(
            "axis-settled", "a release is published already", "Add a new measurement for another axis"
        )
    measurement.name, measurement.about, measurement.axis = name, about, axis
    measurement.x_name, measurement.x_unit = x_name, x_unit
    measurement.y_name, measurement.y_unit = y_name, y_unit
    _save(measurement)


def _save(measurement: Measurement) -> None:
    try:
        with transaction.atomic():
            measurement.save()
    except IntegrityError as error:
        same = Measurement.objects.filter(collaboration=measurement.collaboration, name=measurement.name)
        if not same.exclude(pk=measurement.pk).exists():
            raise
        reason = f"a measurement named “{measurement.name}” is here already"
        raise UserError("name-taken", reason, "Choose another name") from error
