"""What the page of a collaboration shows."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

from django.db.models import Count, Q
from django.urls import reverse
from django.utils.html import format_html, format_html_join
from django.utils.safestring import SafeString

from core.measurements.models import Measurement
from core.people.access import in_overview
from core.people.models import Collaboration, Membership, User
from core.theories.models import Curve, Theory
from fits.overviews.releases import ReleaseSummary, newest_releases
from fits.overviews.reports_seen import reports_seen
from fits.overviews.standings import NewestCurve, Standing, by_theory, newest_curves, standings_in
from fits.reports.models import Report

MOST_REPORTS = 20
JUDGED = '<td><span class="nowrap">{} <a href="{}">rank {} of {}</a></span>{}</td>'
NEWER = '<br><span class="quiet small">version {} not judged yet</span>'
UNJUDGED = '<td class="quiet">{}</td>'


@dataclass(frozen=True)
class MeasurementRow:
    """A measurement and the newest release that the reader sees and that is not withdrawn."""

    measurement: Measurement
    newest: ReleaseSummary | None

    @cached_property
    def assessment_url(self) -> str:
        """Where the assessment of that release is read; many cells lead there."""
        newest = self.newest
        return reverse("reports:assessment", args=[newest.assessment]) if newest and newest.assessment else ""

    @property
    def is_hidden(self) -> bool:
        """Whether nothing is said of its releases: it is sealed, and the reader sees none."""
        return self.measurement.is_sealed and self.newest is None


@dataclass(frozen=True)
class Cell:
    """A theory on a measurement: judged, or submitted and not judged, or without a curve."""

    standing: Standing | None
    newest: NewestCurve | None
    url: str = ""  # of the assessment

    @property
    def html(self) -> SafeString:
        """As it stands in its row. There are hundreds: a template for each would take longer than the page may."""
        if self.standing is None:
            return format_html(UNJUDGED, "not judged" if self.newest else "no curve")
        newer = format_html(NEWER, self.unjudged.version) if self.unjudged else ""
        return format_html(JUDGED, self.standing.sign, self.url, self.standing.rank, self.standing.of, newer)

    @property
    def unjudged(self) -> NewestCurve | None:
        """A submitted version newer than the one judged."""
        if self.standing is None or self.newest is None or self.newest.version <= self.standing.version:
            return None
        return self.newest


@dataclass(frozen=True)
class TheoryRow:
    """A theory with its number of curves, and how it stands on each measurement."""

    theory: Theory
    curves: int
    cells: tuple[Cell, ...]

    @property
    def cells_html(self) -> SafeString:
        """Its cells, one after the other."""
        return format_html_join("", "{}", ((cell.html,) for cell in self.cells))


@dataclass(frozen=True)
class CollaborationPage:
    """Measurements, theories, reports and people, in the order in which they are read."""

    measurements: tuple[MeasurementRow, ...]
    theories: tuple[TheoryRow, ...]
    reports: tuple[Report, ...]
    people: tuple[Membership, ...]

    @property
    def released(self) -> tuple[MeasurementRow, ...]:
        """The measurements on which a theory can stand, the columns of the comparison."""
        return tuple(row for row in self.measurements if row.newest)


def collaboration_page(collaboration: Collaboration, reader: User) -> CollaborationPage:
    """Gather the page, as this reader sees it, in seven queries."""
    measurements = list(Measurement.objects.filter(collaboration=collaboration))
    newest = newest_releases([measurement.pk for measurement in measurements], reader)
    rows = tuple(MeasurementRow(measurement, newest.get(measurement.pk)) for measurement in measurements)
    reports = reports_seen(reader, [collaboration.pk]).select_related("author")
    people = Membership.objects.filter(collaboration=collaboration).select_related("user")
    return CollaborationPage(
        measurements=rows,
        theories=_theories(collaboration, reader, [row for row in rows if row.newest]),
        reports=tuple(
            reports.only(
                "title", "state", "created_at", "frozen_at", "collaboration", "author__name", "author__email"
            )[:MOST_REPORTS]
        ),
        people=tuple(people),
    )


def _theories(
    collaboration: Collaboration, reader: User, released: Sequence[MeasurementRow]
) -> tuple[TheoryRow, ...]:
    assessments = {
        row.measurement.pk: row.newest.assessment for row in released if row.newest and row.newest.assessment
    }
    found = standings_in(assessments.values())
    judged = {
        measurement: by_theory(found.get(assessment, [])) for measurement, assessment in assessments.items()
    }
    newest = newest_curves([row.measurement.pk for row in released], reader)
    submitted = Count("curves", filter=Q(curves__state=Curve.State.SUBMITTED))
    theories = in_overview(Theory.objects.filter(collaboration=collaboration), reader)
    return tuple(
        TheoryRow(
            theory=theory,
            curves=theory.submitted,
            cells=tuple(
                Cell(
                    standing=judged.get(row.measurement.pk, {}).get(theory.pk),
                    newest=newest.get((theory.pk, row.measurement.pk)),
                    url=row.assessment_url,
                )
                for row in released
            ),
        )
        for theory in theories.annotate(submitted=submitted).order_by("name", "pk")
    )
