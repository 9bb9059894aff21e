"""What the page of a measurement shows."""

from dataclasses import dataclass

from core.measurements.models import Measurement, Release
from core.measurements.release_page import ReleasePage, release_page
from core.theories.models import Theory
from fits.assessments.models import Assessment
from fits.overviews.standings import (
    History,
    NewestCurve,
    ReleaseSummary,
    Standing,
    by_theory,
    histories,
    newest_curves,
    releases_of,
    standings_in,
)

MOST_ASSESSMENTS = 12


@dataclass(frozen=True)
class MeasurementPage:
    """Releases newest first; standings on the newest; the curves that its assessment has not judged."""

    releases: tuple[ReleaseSummary, ...]
    standings: tuple[Standing, ...]
    unjudged: tuple[NewestCurve, ...]
    histories: tuple[History, ...]
    drafts: tuple[Release, ...]
    assessments: tuple[Assessment, ...]
    theories: tuple[Theory, ...]

    @property
    def newest(self) -> ReleaseSummary | None:
        """The newest published release."""
        return self.releases[0] if self.releases else None

    @property
    def has_off(self) -> bool:
        """Whether a curve is inside the ball and outside the scale set."""
        return any(standing.is_off for standing in self.standings)

    @property
    def oldest_first(self) -> tuple[ReleaseSummary, ...]:
        """The releases as the columns of the history."""
        return self.releases[::-1]

    @property
    def inside(self) -> tuple[Standing, ...]:
        """Those inside at 95 %."""
        return tuple(standing for standing in self.standings if standing.is_inside)


def measurement_page(measurement: Measurement, *, with_drafts: bool) -> MeasurementPage:
    """Gather the page in six queries. Drafts are for those who publish."""
    releases = releases_of([measurement.pk]).get(measurement.pk, [])
    found = standings_in([release.assessment for release in releases if release.assessment])
    newest = found.get(releases[0].assessment or 0, []) if releases else []
    judged = by_theory(newest)
    drafts = Release.objects.filter(measurement=measurement, state=Release.State.DRAFT)
    return MeasurementPage(
        releases=tuple(releases),
        standings=tuple(newest),
        unjudged=tuple(
            curve
            for curve in newest_curves([measurement.pk]).values()
            if curve.theory not in judged or judged[curve.theory].version < curve.version
        ),
        histories=tuple(histories(releases, found)),
        drafts=tuple(
            drafts.only("file_name", "points", "note", "created_at", "number").order_by("-created_at")
            if with_drafts
            else ()
        ),
        assessments=tuple(
            Assessment.objects.filter(release__measurement=measurement)
            .select_related("release", "requested_by")
            .only(
                "status",
                "stage",
                "progress",
                "created_at",
                "failure",
                "release__number",
                "requested_by__name",
                "requested_by__email",
            )[:MOST_ASSESSMENTS]
        ),
        theories=tuple(Theory.objects.filter(collaboration=measurement.collaboration_id).only("name")),
    )


def newest_data(page: MeasurementPage) -> ReleasePage | None:
    """Table and plot of the newest release: the one stored table that is loaded."""
    if page.newest is None:
        return None
    return release_page(Release.objects.select_related("measurement").get(pk=page.newest.pk))
