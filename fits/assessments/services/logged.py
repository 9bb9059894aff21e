"""What the log says of assessments: hidden with the data of their measurement, at the desk of their curves."""

from collections.abc import Mapping
from typing import Any

from core.measurements.models import Release
from core.people.log import Deed, record
from core.people.models import User
from fits.assessments.models import Assessment


def record_deed(
    deed: Deed,
    assessment: Assessment,
    who: User | None,
    *,
    more: str = "",
    detail: Mapping[str, Any] | None = None,
) -> None:
    """Write an entry about this assessment; `more` is said behind its name."""
    # Fetched here, as whoever asks has seldom loaded it, and its table is large.
    releases = Release.objects.select_related("measurement__collaboration").defer("table", "lines")
    release = releases.get(pk=assessment.release_id)
    record(
        deed,
        who=who,
        collaboration=release.measurement.collaboration,
        about=f"{assessment}, {release} of {release.measurement}{more}",
        url=assessment.get_absolute_url(),
        detail=detail,
        desk=assessment.desk,
        hidden_with=release.measurement,
    )
