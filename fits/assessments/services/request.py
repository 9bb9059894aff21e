"""Ask for an assessment."""

from collections.abc import Iterable, Mapping, Sequence
from functools import partial
from typing import Any

from django.db import IntegrityError, transaction

from core.errors import UserError
from core.measurements.models import Release
from core.people.log import Deed
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.dispatch import enqueue
from fits.assessments.fingerprint import fingerprint
from fits.assessments.models import Assessment
from fits.assessments.services.find_features import find_own_features, wants_features
from fits.assessments.services.logged import record_deed


def request_assessment(
    *,
    user: User,
    release: Release,
    curves: Iterable[Curve],
    settings: Mapping[str, Any],
    seed: int,
    is_automatic: bool = False,
    left_out: Sequence[Curve] = (),
) -> Assessment:
    """The assessment of these inputs: one that waits, runs or is done already, else a new one, enqueued.

    left_out  curves that would have been judged with them, and cannot be on this release: the log names them
    """
    chosen = sorted(set(curves), key=lambda curve: curve.pk)
    _check(release, chosen)
    mark = fingerprint(release=release, curves=chosen, settings=settings, seed=seed)
    if same := _same(mark):
        _add_features(user, same, settings)
        return same
    try:
        with transaction.atomic():
            _refuse_withdrawn(release)
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
            record_deed(
                Deed.BEGAN_ASSESSMENT if is_automatic else Deed.ASKED_ASSESSMENT,
                assessment,
                None if is_automatic else user,
                detail=_curves_in_words(chosen, left_out),
            )
            transaction.on_commit(partial(enqueue, Assessment, assessment.pk))
    except IntegrityError:
        # Somebody asked for the same at the same moment and came first.
        if same := _same(mark):
            _add_features(user, same, settings)
            return same
        raise
    return assessment


def _curves_in_words(chosen: Sequence[Curve], left_out: Sequence[Curve]) -> dict[str, list[str]]:
    words = {"curves": [str(curve) for curve in chosen]}
    if left_out:
        words["left out, as they do not reach over the data"] = [str(curve) for curve in left_out]
    return words


def _refuse_withdrawn(release: Release) -> None:
    """Whoever withdraws the release at this moment waits until it is asked for, or has it refused."""
    # By its key: in the order of their measurements, the measurement's row would be locked with it, and after it.
    rows = Release.objects.select_for_update().filter(pk=release.pk).order_by("pk")
    if rows.values_list("state", flat=True).first() == Release.State.WITHDRAWN:
        raise UserError("release-withdrawn", f"{release} is withdrawn", "Choose one that is not")


def _same(mark: str) -> Assessment | None:
    again = (Assessment.Status.FAILED, Assessment.Status.CANCELLED)
    same = Assessment.objects.filter(fingerprint=mark).exclude(status__in=again).first()
    if same and same.cancel_requested and not same.has_ended:
        # It may still come to its end before its worker looks, so that no second one can be there beside it.
        raise UserError(
            "being-cancelled",
            "the same assessment was cancelled and its worker is about to stop",
            "Ask again in a moment",
        )
    return same


def _add_features(user: User, same: Assessment, settings: Mapping[str, Any]) -> None:
    """Features move no number of an assessment: whoever asks for the same with them gets them added."""
    if not wants_features(settings):
        return
    if not wants_features(same.settings):
        with transaction.atomic():
            Assessment.objects.filter(pk=same.pk).update(settings=dict(same.settings) | {"features": True})
            record_deed(Deed.ASKED_FEATURES, same, user)
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
