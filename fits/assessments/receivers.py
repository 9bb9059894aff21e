"""What follows for assessments when a release is published or withdrawn, or a measurement opens."""

from typing import Any

from django.dispatch import receiver

from core.measurements.models import Measurement, Release
from core.measurements.signals import measurement_opened, release_published, release_withdrawn
from core.people.models import User


@receiver(release_published)
def assess_published(*, release: Release, by: User, **_: Any) -> None:
    """Judge all current curves on it, unless its data are sealed."""
    _assess_current(release.measurement, by)


@receiver(release_withdrawn)
def assess_left(*, release: Release, by: User, **_: Any) -> None:
    """Judge on the release that is the newest now the curves that came since; nothing where none did."""
    _assess_current(release.measurement, by)


@receiver(measurement_opened)
def assess_opened(*, measurement: Measurement, by: User | None, **_: Any) -> None:
    """Judge all curves that were submitted while the data were hidden."""
    _assess_current(measurement, by)


def _assess_current(measurement: Measurement, by: User | None) -> None:
    # Loaded here: every command listens, and few of them need the engine, which takes seconds to load.
    from fits.assessments.services import assess_current

    assess_current(measurement, by=by)
