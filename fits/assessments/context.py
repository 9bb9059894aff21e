"""Where an assessment came from: the people, files and settings behind its numbers."""

from typing import Any

from fits.assessments.models import Assessment


def context_of(assessment: Assessment) -> dict[str, Any]:
    """Provenance as plain JSON; a report freezes it with the result."""
    release = assessment.release
    measurement = release.measurement
    curves = assessment.curves.select_related("theory", "submitted_by")
    names = curve_names(assessment)
    return {
        "collaboration": measurement.collaboration.name,
        "measurement": {
            "name": measurement.name,
            "about": measurement.about,
            "x_label": measurement.x_label,
            "y_label": measurement.y_label,
            "x_unit": measurement.x_unit,
            "y_unit": measurement.y_unit,
            "axis": measurement.axis,
        },
        "release": {
            "number": release.number,
            "note": release.note,
            "file_name": release.file_name,
            "file_sha256": release.file_sha256,
            "covariance_name": release.covariance_name,
            "covariance_sha256": release.covariance_sha256,
            "windows_name": release.windows_name,
            "windows_sha256": release.windows_sha256,
            "calibration": release.calibration,
            "points": release.points,
            "published_at": _iso(release.published_at),
        },
        "curves": [
            {
                "name": names[curve.pk],
                "theory": curve.theory.name,
                "version": curve.version,
                "proposed_by": curve.theory.proposed_by,
                "reference": curve.theory.reference,
                "file_name": curve.file_name,
                "file_sha256": curve.file_sha256,
                "submitted_by": str(curve.submitted_by),
                "submitted_at": _iso(curve.submitted_at),
            }
            for curve in curves
        ],
        "settings": assessment.settings,
        "seed": assessment.seed,
        "engine": assessment.engine_version,
        "fingerprint": assessment.fingerprint,
        "requested_by": str(assessment.requested_by),
        "created_at": _iso(assessment.created_at),
        "ended_at": _iso(assessment.ended_at),
        "recompute": f"python manage.py recompute {assessment.pk}",
        "source": str(assessment),
    }


def curve_names(assessment: Assessment) -> dict[int, str]:
    """Curve key → name in the result: the theory's, with the version where two curves share a theory."""
    curves = list(assessment.curves.select_related("theory"))
    theories = [curve.theory_id for curve in curves]
    names = {
        curve.pk: curve.theory.name if theories.count(curve.theory_id) == 1 else str(curve)
        for curve in curves
    }
    # A theory that is renamed keeps in a result the name that it was judged under.
    ranked = {found["rank"]: found["name"] for found in (assessment.result or {}).get("curves", ())}
    judged = assessment.verdicts.values_list("curve", "rank") if ranked else ()
    return names | {curve: ranked[rank] for curve, rank in judged if rank in ranked}


def _iso(moment: Any) -> str | None:
    return moment.isoformat() if moment else None
