"""Ask for the features of an assessment, and cancel that."""

import hashlib
import json
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from django.db import IntegrityError, transaction

from core.people.log import Deed
from core.people.models import User
from core.user_error import UserError
from fits.assessments import leases, searches
from fits.assessments.feature_parts import refuse_other_engine
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch
from fits.assessments.pipeline import user_error
from fits.assessments.services.logged import record_deed
from fits.engine import VERSION
from fits.engine.features.space import refuse_many_windows, window_on
from fits.engine.refusal import InputRefused

Status = FeatureSearch.Status
Windows = Sequence[tuple[float, float]]


def request_features(*, user: User, assessment: Assessment, windows: Windows = ()) -> FeatureSearch:
    """The search in these windows, or in the fit's own: one that waits, runs or is done already, else a new one."""
    if assessment.status != Assessment.Status.DONE or assessment.result is None:
        raise UserError("assessment-not-done", "this assessment has no fit yet", "Wait until it is done")
    refuse_other_engine(assessment)
    _refuse_bad(windows, assessment.result)
    chosen = sorted({(float(low), float(high)) for low, high in windows})
    return _search(user, assessment, chosen, is_logged=True)


def find_own_features(user: User, assessment: Assessment) -> FeatureSearch:
    """The search in the fit's own windows, which every assessment starts unless its settings say otherwise."""
    return _search(user, assessment, [])


def wants_features(settings: Mapping[str, Any]) -> bool:
    """Whether features are sought as soon as an assessment is done."""
    return bool(settings.get("features", True))


def cancel_features(search: FeatureSearch, *, by: User) -> None:
    """Cancel at once what still waits; what runs ends at its worker's next look; what has ended stays."""
    with transaction.atomic():
        found = FeatureSearch.objects.select_for_update().get(pk=search.pk)
        if not found.has_ended:
            living = found.parts.filter(status__in=FeaturePart.LIVING)
            living.update(cancel_requested=True)
            leases.end(living.filter(status=Status.QUEUED), Status.CANCELLED)
            found.status = Status.CANCELLED
            found.save(update_fields=["status"])
            record_deed(Deed.CANCELLED_FEATURES, found.assessment, by)
    search.refresh_from_db()


def _refuse_bad(windows: Windows, result: Mapping[str, Any]) -> None:
    # The grid that the fit is drawn on is the one on which features are sought.
    grid = np.array(result["fit"]["x"])
    try:
        refuse_many_windows(len(windows))
        for low, high in windows:
            window_on(grid, low, high)
    except InputRefused as refusal:
        raise user_error(refusal) from refusal


def _search(
    user: User, assessment: Assessment, windows: list[tuple[float, float]], *, is_logged: bool = False
) -> FeatureSearch:
    mark = _fingerprint(assessment, windows)
    if same := _same(mark):
        return same
    try:
        with transaction.atomic():
            search = FeatureSearch.objects.create(
                assessment=assessment, windows=windows, fingerprint=mark, requested_by=user
            )
            searches.begin(search)
            if is_logged:
                record_deed(Deed.ASKED_FEATURES, assessment, user, detail={"windows": windows})
    except IntegrityError:
        # Somebody asked for the same at the same moment and came first.
        if same := _same(mark):
            return same
        raise
    return search


def _fingerprint(assessment: Assessment, windows: list[tuple[float, float]]) -> str:
    document = {"engine": VERSION, "assessment": assessment.pk, "windows": windows}
    return hashlib.sha256(json.dumps(document, sort_keys=True, allow_nan=False).encode()).hexdigest()


def _same(mark: str) -> FeatureSearch | None:
    again = (Status.FAILED, Status.CANCELLED)
    return FeatureSearch.objects.filter(fingerprint=mark).exclude(status__in=again).first()
