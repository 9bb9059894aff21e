"""What tests of seals start from."""

from datetime import UTC, datetime, timedelta
from typing import Any

from django.utils import timezone

from core.measurements import services
from core.measurements.models import Measurement, Release
from core.measurements.seal_terms import SealTerms
from core.people.models import User

TABLE = "x,y,error\n" + "".join(f"{x},{x * x},0.1\n" for x in range(1, 11))
DAY = timedelta(days=1)


def soon(**more: float) -> datetime:
    """A minute to come, so far from now."""
    return (timezone.now().astimezone(UTC) + timedelta(**more)).replace(second=0, microsecond=0)


def seal(measurement: Measurement, user: User, **terms: Any) -> None:
    """Seal it under these terms."""
    services.seal_measurement(
        user=user, measurement=measurement, seen=measurement.revision, terms=SealTerms(**terms)
    )


def change(measurement: Measurement, user: User, **terms: Any) -> None:
    """Change the terms of its seal, which its reader has seen as they stand."""
    measurement.refresh_from_db()
    services.change_seal(
        user=user, measurement=measurement, seen=measurement.revision, terms=SealTerms(**terms)
    )


def drafted(measurement: Measurement, user: User, text: str = TABLE) -> Release:
    """A draft release with ten points, x from 1 to 10."""
    return services.draft_release(
        user=user, measurement=measurement, content=text.encode(), file_name="tank.csv"
    )


def published(measurement: Measurement, user: User) -> Release:
    """The same, published."""
    return services.publish_release(drafted(measurement, user), user)


def pass_time(measurement: Measurement, **moments: datetime) -> None:
    """Have these moments of its seal come, as if time had passed."""
    Measurement.objects.filter(pk=measurement.pk).update(**moments)
    measurement.refresh_from_db()
