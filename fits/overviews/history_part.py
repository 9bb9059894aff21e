"""The part of a measurement's page that tells its history: chart, choice of theories, and what changed."""

from collections.abc import Collection, Iterable
from dataclasses import dataclass
from typing import Any
from urllib.parse import urlencode

from django.http import QueryDict
from django.urls import reverse

from core.measurements.models import Measurement
from core.people.models import User
from fits.overviews.history import History, histories
from fits.overviews.history_chart import MOST_LINES, drawn_histories, history_figure
from fits.overviews.measurement import MeasurementPage
from fits.overviews.releases import ReleaseSummary, releases_of
from fits.overviews.standings import standings_in
from fits.reports.charts import Chart, chart_of
from fits.reports.figures.figure import Figure
from fits.reports.figures.plotly import plotly_json


@dataclass(frozen=True)
class HistoryPart:
    """chart: what stands beside the drawing; plot: what the page draws; drawn: the theories that have a line;
    left: those that left the 95 % set."""

    chart: Chart
    plot: dict[str, Any]
    drawn: frozenset[int]
    can_choose: bool
    most: int
    left: tuple[History, ...]


@dataclass(frozen=True)
class HistoryAddresses:
    """Where the files of the chart are fetched from, under the same choice of theories."""

    measurement: int
    chosen: tuple[int, ...]

    def chart(self, figure: Figure, form: str) -> str:
        """The chart as "svg" or "csv"."""
        path = reverse("overviews:history_chart", args=[self.measurement, figure.name, form])
        return f"{path}?{urlencode([('theory', key) for key in self.chosen])}" if self.chosen else path


def chosen_theories(asked: QueryDict) -> tuple[int, ...]:
    """The theories that the query asks for lines of, each once."""
    keys: Iterable[str] = dict.fromkeys(asked.getlist("theory"))
    return tuple(int(key) for key in keys if key.isascii() and key.isdecimal() and len(key) < 19)


def history_of(measurement: Measurement, reader: User) -> tuple[list[ReleaseSummary], list[History]]:
    """The releases and the theories over them, as this reader sees them. Two queries."""
    releases = releases_of([measurement.pk], reader).get(measurement.pk, [])
    found = standings_in([release.assessment for release in releases if release.assessment])
    return releases, histories(releases, found)


def history_part(
    measurement: Measurement, page: MeasurementPage, chosen: Collection[int]
) -> HistoryPart | None:
    """None where there is only one release, or nothing is judged."""
    known = {history.theory for history in page.histories}
    chosen = tuple(key for key in chosen if key in known)
    figure = history_figure(page.histories, page.releases, chosen) if len(page.releases) > 1 else None
    if figure is None:
        return None
    drawn = drawn_histories(page.histories, chosen)
    return HistoryPart(
        plot=plotly_json(figure),
        chart=chart_of(figure, HistoryAddresses(measurement.pk, chosen)),
        drawn=frozenset(history.theory for history in drawn),
        can_choose=len(page.histories) > 1,
        most=MOST_LINES,
        left=tuple(history for history in page.histories if history.has_left),
    )
