"""What pages say of a measurement's seal, and what their reader may do about it."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime

from core.measurements.models import EarlyLook, Measurement, Release
from core.measurements.seal_terms import SealTerms
from core.people.access import Action, Someone, may


@dataclass(frozen=True)
class SealPage:
    """The seal of `measurement`, as its reader may see it.

    looks       who saw the data before they were open, oldest first
    has_looked  whether the reader is one of them
    may_begin   whether the reader may seal what is not sealed, and was never published
    may_change  whether the reader may look, open, and change the terms
    """

    measurement: Measurement
    terms: SealTerms
    is_sealed: bool
    opened: datetime | None
    takes_curves: bool
    looks: Sequence[EarlyLook]
    has_looked: bool
    may_begin: bool
    may_change: bool

    @property
    def is_shown(self) -> bool:
        """Whether there is anything to say."""
        return self.measurement.was_sealed or self.may_begin


def seal_of(measurement: Measurement, reader: Someone) -> SealPage:
    """Gathered in three queries, whatever there is."""
    is_sealed = measurement.is_sealed
    looks = looks_at(measurement)
    is_lead = may(reader, Action.SEAL, measurement.collaboration)
    # Asked only where everybody sees what is published.
    may_begin = is_lead and not measurement.was_sealed and not _has_published(measurement)
    return SealPage(
        measurement=measurement,
        terms=SealTerms.of(measurement),
        is_sealed=is_sealed,
        opened=measurement.opened,
        takes_curves=measurement.takes_curves,
        looks=looks,
        has_looked=any(look.user_id == reader.pk for look in looks),
        may_begin=may_begin,
        may_change=is_lead and is_sealed,
    )


def looks_at(measurement: Measurement) -> tuple[EarlyLook, ...]:
    """Who saw its data before they were open."""
    if not measurement.was_sealed:
        return ()
    return tuple(EarlyLook.objects.filter(measurement=measurement).select_related("user"))


def _has_published(measurement: Measurement) -> bool:
    return measurement.releases.exclude(state=Release.State.DRAFT).exists()
