"""When two assessments are the same computation."""

import hashlib
import json
from collections.abc import Iterable, Mapping
from typing import Any

from core.measurements.models import Release
from core.theories.models import Curve
from fits.engine import VERSION


def fingerprint(*, release: Release, curves: Iterable[Curve], settings: Mapping[str, Any], seed: int) -> str:
    """SHA-256 over everything that the numbers depend on; the order of the curves is no part of it, nor is whether
    features are sought afterwards."""
    document = {
        "engine": VERSION,
        "release": {
            "key": release.pk,
            "file": release.file_sha256,
            "covariance": release.covariance_sha256,
            "windows": release.windows_sha256,
            "columns": release.columns,
            "errors": release.error_source,
            "calibration": release.calibration,
            "axis": release.measurement.axis,
        },
        "curves": sorted([curve.pk, curve.file_sha256] for curve in curves),
        "settings": {name: value for name, value in settings.items() if name != "features"},
        "seed": seed,
    }
    text = json.dumps(document, sort_keys=True, separators=(",", ":"), allow_nan=False)
    return hashlib.sha256(text.encode()).hexdigest()
