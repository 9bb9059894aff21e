"""What the page of a measurement shows."""

from dataclasses import dataclass

from core.measurements.models import Measurement, Release
from core.measurements.release_page import ReleasePage, release_page
from core.people.access import in_overview, sees_data
from core.people.models import User
from core.theories.models import Theory
from fits.assessments.models import Assessment
from fits.overviews.history import History, histories
from fits.overviews.releases import ReleaseSummary, newest_of, releases_of
from fits.overviews.standings import NewestCurve, Standing, by_theory, newest_curves, standings_in

MOST_ASSESSMENTS = 12


@dataclass(frozen=True)
class MeasurementPage:
    """Releases newest first; standings on the newest; the curves that its assessment has not judged.

    is_hidden  whether data and verdicts are sealed for the reader: all that tells of them is then empty
    newest     the newest release that is not withdrawn
    """

    is_hidden: bool
    releases: tuple[ReleaseSummary, ...]
    newest: ReleaseSummary | None
    standings: tuple[Standing, ...]
    unjudged: tuple[NewestCurve, ...]
    histories: tuple[History, ...]
    drafts: tuple[Release, ...]
    assessments: tuple[Assessment, ...]
    theories: tuple[Theory, ...]

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


def measurement_page(measurement: Measurement, reader: User, *, with_drafts: bool) -> MeasurementPage:
    """Gather the page, as this reader sees it, in seven queries. Drafts are for those who publish."""
    releases = releases_of([measurement.pk], reader).get(measurement.pk, [])
    found = standings_in([release.assessment for release in releases if release.assessment])
    counting = newest_of(releases)
    newest = found.get(counting.assessment or 0, []) if counting else []
    judged = by_theory(newest)
    drafts = in_overview(Release.objects.filter(measurement=measurement, state=Release.State.DRAFT), reader)
    return MeasurementPage(
        is_hidden=not sees_data(reader, measurement),
        releases=tuple(releases),
        newest=counting,
        standings=tuple(newest),
        unjudged=tuple(
            curve
            for curve in newest_curves([measurement.pk], reader).values()
            if curve.theory not in judged or judged[curve.theory].version < curve.version
        ),
        histories=tuple(histories(releases, found)),
        drafts=tuple(
            drafts.only("file_name", "points", "note", "created_at", "number").order_by("-created_at")
            if with_drafts
            else ()
        ),
        assessments=tuple(
            in_overview(Assessment.objects.filter(release__measurement=measurement), reader)
            .select_related("release", "requested_by")
            .only(
                "status",
                "stage",
                "progress",
                "created_at",
                "failure",
                "release__number",
                "release__state",
                "requested_by__name",
                "requested_by__email",
            )[:MOST_ASSESSMENTS]
        ),
        theories=tuple(
            in_overview(Theory.objects.filter(collaboration=measurement.collaboration_id), reader).only(
                "name"
            )
        ),
    )


def newest_data(page: MeasurementPage) -> ReleasePage | None:
    """Table and plot of the newest release: the one stored table that is loaded."""
    if page.newest is None:
        return None
    return release_page(Release.objects.select_related("measurement").get(pk=page.newest.pk))
