"""What the page of a theory shows."""

from dataclasses import dataclass

from core.people.access import seen_by
from core.people.models import User
from core.theories.models import Curve, Theory
from fits.overviews.standings import Standing, standings_of_theory


@dataclass(frozen=True)
class TheoryPage:
    """The curves by measurement, newest version first; where they were judged; the reader's own drafts."""

    curves: tuple[Curve, ...]
    drafts: tuple[Curve, ...]
    standings: tuple[Standing, ...]


def theory_page(theory: Theory, reader: User) -> TheoryPage:
    """Gather the page in two queries."""
    curves = list(
        seen_by(Curve.objects.filter(theory=theory), reader)
        .select_related("measurement", "submitted_by")
        .defer("table")
        .order_by("measurement__name", "measurement", "-version", "-pk")
    )
    return TheoryPage(
        curves=tuple(curve for curve in curves if curve.state == Curve.State.SUBMITTED),
        drafts=tuple(
            curve
            for curve in curves
            if curve.state == Curve.State.DRAFT and curve.submitted_by_id == reader.pk
        ),
        standings=tuple(standings_of_theory(theory.pk, reader)),
    )
