"""Ask for an assessment."""

from collections.abc import Iterable, Mapping
from functools import partial
from typing import Any

from django.db import IntegrityError, transaction

from core.errors import UserError
from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.dispatch import enqueue
from fits.assessments.fingerprint import fingerprint
from fits.assessments.models import Assessment
from fits.assessments.services.find_features import find_own_features, wants_features


def request_assessment(
    *,
    user: User,
    release: Release,
    curves: Iterable[Curve],
    settings: Mapping[str, Any],
    seed: int,
    is_automatic: bool = False,
) -> Assessment:
    """The assessment of these inputs: one that waits, runs or is done already, else a new one, enqueued."""
    chosen = sorted(set(curves), key=lambda curve: curve.pk)
    _check(release, chosen)
    mark = fingerprint(release=release, curves=chosen, settings=settings, seed=seed)
    if same := _same(mark):
        _add_features(user, same, settings)
        return same
    try:
        with transaction.atomic():
            assessment = Assessment.objects.create(
                release=release,
                settings=dict(settings),
                seed=seed,
                fingerprint=mark,
                requested_by=user,
                desk=chosen[0].theory.desk,
                is_automatic=is_automatic,
            )
            assessment.curves.set(chosen)
            transaction.on_commit(partial(enqueue, Assessment, assessment.pk))
    except IntegrityError:
        # Somebody asked for the same at the same moment and came first.
        if same := _same(mark):
            _add_features(user, same, settings)
            return same
        raise
    return assessment


def _same(mark: str) -> Assessment | None:
    again = (Assessment.Status.FAILED, Assessment.Status.CANCELLED)
    return Assessment.objects.filter(fingerprint=mark).exclude(status__in=again).first()


def _add_features(user: User, same: Assessment, settings: Mapping[str, Any]) -> None:
    """Features move no number of an assessment: whoever asks for the same with them gets them added."""
    if not wants_features(settings):
        return
    if not wants_features(same.settings):
        Assessment.objects.filter(pk=same.pk).update(settings=dict(same.settings) | {"features": True})
    same.refresh_from_db(fields=["status", "settings"])
    if same.status == Assessment.Status.DONE:
        find_own_features(user, same)


def _check(release: Release, curves: list[Curve]) -> None:
    if release.is_withdrawn:
        raise UserError("release-withdrawn", f"{release} is withdrawn", "Choose one that is not")
    if release.state != Release.State.PUBLISHED:
        raise UserError("release-not-published", "this release is a draft", "Publish it first")
    if not curves:
        raise UserError("no-curves", "no curve is chosen", "Choose at least one")
    if len({curve.theory.desk_id for curve in curves}) > 1:
        raise UserError(
            "several-desks",
            "these curves stand at several desks, or some are shared and some are not",
            "Choose the curves of one desk, or shared ones: who sees an assessment sees all its curves",
        )
    for curve in curves:
        if curve.state != Curve.State.SUBMITTED:
            raise UserError(
                "curve-not-submitted", f"the curve of {curve.theory} is a draft", "Submit it first"
            )
        if curve.measurement_id != release.measurement_id:
            raise UserError(
                "wrong-measurement",
                f"the curve of {curve.theory} belongs to another measurement",
                f"Choose curves for {release.measurement}",
            )
