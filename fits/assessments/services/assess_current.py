"""Assess all current curves of a measurement: when a release is published or withdrawn, and when a sealed measurement
opens."""

from collections.abc import Iterable, Sequence
from typing import Any

from django.db.models import Count

from core.errors import UserError
from core.measurements.models import Measurement, Release
from core.measurements.stored_release import interval_of_release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.current_curves import current_curves
from fits.assessments.default_settings import DEFAULT_SEED, default_settings
from fits.assessments.models import Assessment
from fits.assessments.services.request import request_assessment
from fits.engine.basis import Interval

# How far outside its own grid rounding may put a point, as a share of the range: as far as the engine lets it.
ROUNDING = 1e-9
ENDED_BADLY = (Assessment.Status.FAILED, Assessment.Status.CANCELLED)


def assess_current(measurement: Measurement, *, by: User | None) -> list[Assessment]:
    """One assessment of the shared curves and one for each desk, on the newest release that is published; none while
    the measurement is sealed. Curves that do not reach over its x are left out.

    by  who published, withdrew or opened it; None for an opening at its time, which whoever published answers for
    """
    published = measurement.releases.filter(state=Release.State.PUBLISHED)
    release = published.select_related("measurement", "created_by").order_by("-number").first()
    if release is None or measurement.is_sealed:
        return []
    desks = _by_desk(current_curves(measurement.pk))
    if not desks:
        return []
    reach = interval_of_release(release)
    made = [_assess_desk(release, reach, curves, by or release.created_by) for curves in desks]
    return [assessment for assessment in made if assessment]


def _by_desk(curves: Iterable[Curve]) -> list[list[Curve]]:
    desks: dict[int | None, list[Curve]] = {}
    for curve in curves:
        desks.setdefault(curve.theory.desk_id, []).append(curve)
    return list(desks.values())


def _assess_desk(release: Release, reach: Interval, curves: Sequence[Curve], user: User) -> Assessment | None:
    slack = ROUNDING * (reach.high - reach.low)
    reaching = [
        curve for curve in curves if curve.x_min <= reach.low + slack and curve.x_max >= reach.high - slack
    ]
    if not reaching:
        return None
    settings, seed = _as_before(release.measurement, reaching[0].theory.desk_id)
    try:
        return request_assessment(
            user=user,
            release=release,
            curves=reaching,
            settings=settings,
            seed=seed,
            is_automatic=True,
            left_out=[curve for curve in curves if curve not in reaching],
        )
    except UserError:
        # The same one is just being cancelled: nobody wants it, and the release is published all the same.
        return None


def _as_before(measurement: Measurement, desk: int | None) -> tuple[dict[str, Any], int]:
    """Settings and seed of the assessment that pages show at this desk, so that releases can be compared: on the newest
    release that has one, of those that judge the most theories the newest."""
    before = (
        Assessment.objects.filter(release__measurement=measurement, desk=desk)
        .exclude(status__in=ENDED_BADLY)
        .annotate(theories=Count("curves__theory", distinct=True))
        .order_by("-release__number", "-theories", "-created_at", "-pk")
        .values("settings", "seed")
        .first()
    )
    return (before["settings"], before["seed"]) if before else (default_settings(), DEFAULT_SEED)
