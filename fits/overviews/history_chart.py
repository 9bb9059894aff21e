"""The history of a measurement as a chart: one line a theory, release by release."""

from collections.abc import Collection, Sequence
from itertools import groupby

from fits.assessments.three_verdicts import LEVEL, LEVEL_KEY
from fits.overviews.history import History
from fits.overviews.releases import ReleaseSummary
from fits.overviews.standings import Standing
from fits.reports.figures import palette
from fits.reports.figures.figure import (
    Axis,
    Cell,
    Dash,
    Figure,
    Layer,
    Line,
    Marker,
    Panel,
    Points,
    Table,
    log_axis,
)

NAME = "history"
# As many as there are colours that stay apart.
MOST_LINES = len(palette.CURVES)
# Distances that differ by more than this factor are drawn on a logarithmic axis.
WIDE = 8.0
TABLE_COLUMNS = (
    "theory",
    "release",
    "withdrawn",
    "version",
    "distance",
    "radius at 95 %",
    "distance / radius",
    "entry level",
    "p-value",
    "at 95 %",
)
Drawn = tuple[tuple[float, Standing], ...]


def drawn_histories(histories: Sequence[History], chosen: Collection[int] = ()) -> list[History]:
    """The theories that get a line: those chosen, else those that moved, and then the nearest, while there is room."""
    if chosen:
        wanted = [history for history in histories if history.theory in chosen]
    else:
        wanted = sorted(histories, key=lambda history: not history.has_moved)
    first = {history.theory for history in wanted[:MOST_LINES]}
    return [history for history in histories if history.theory in first]


def history_figure(
    histories: Sequence[History], releases: Sequence[ReleaseSummary], chosen: Collection[int] = ()
) -> Figure | None:
    """Distance in radii and entry level over the releases; None where nothing is judged."""
    if not histories:
        return None
    ordered = sorted(releases, key=lambda release: release.number)
    drawn = drawn_histories(histories, chosen)
    shares = [
        share
        for history in drawn
        for standing in history.standings
        if standing is not None and (share := standing.share_of_radius)
    ]
    first = _distance_axis(shares)
    layers = _guides(ordered, first)
    for index, history in enumerate(drawn):
        layers += _theory(history, palette.curve_colour(index))
    return Figure(
        name=NAME,
        title="From release to release",
        caption=_caption(drawn, len(histories), ordered),
        x=Axis(
            "release",
            ticks=tuple(float(release.number) for release in ordered),
            range=(ordered[0].number - 0.25, ordered[-1].number + 0.25),
        ),
        panels=(Panel(first), Panel(Axis("entry level", ticks=(0.0, 0.5, LEVEL), range=(-0.04, 1.04)))),
        layers=tuple(layers),
        table=_table(histories),
        level=LEVEL_KEY,
        has_key=True,
        height=4.8,
    )


def _distance_axis(shares: Sequence[float]) -> Axis:
    label = "distance / 95 % radius"
    low, high = min((1.0, *shares)), max((1.0, *shares))
    if high / low > WIDE:
        ticks = log_axis(label, (low, high)).ticks
        return Axis(label, log=True, ticks=ticks)
    return Axis(label, range=(0.0, 1.12 * high))


def _guides(releases: Sequence[ReleaseSummary], first: Axis) -> list[Layer]:
    ends = (releases[0].number - 0.25, releases[-1].number + 0.25)
    edges: list[Layer] = [
        Line(
            label="edge of the 95 % set",
            colour=palette.INK,
            x=ends,
            y=(edge, edge),
            dash=Dash.DASH_DOTTED,
            thickness=1.1,
            panel=panel,
        )
        for panel, edge in enumerate((1.0, LEVEL))
    ]
    withdrawn = [float(release.number) for release in releases if release.is_withdrawn]
    # Stands in the lower panel, whose height is known.
    return edges + [
        Line(
            label="withdrawn release",
            colour=palette.GUIDE,
            x=(number, number),
            y=(-0.04, 1.04),
            dash=Dash.DOTTED,
            thickness=1.4,
            panel=1,
        )
        for number in withdrawn
    ]


def _theory(history: History, colour: str) -> list[Layer]:
    layers: list[Layer] = []
    for panel in range(2):
        for run in _runs(history, panel):
            layers.append(
                Line(
                    label=history.theory_name,
                    colour=colour,
                    x=tuple(float(standing.release_number) for _, standing in run),
                    y=tuple(value for value, _ in run),
                    panel=panel,
                )
            )
            layers += _signs(run, colour, panel)
    return layers


def _signs(run: Drawn, colour: str, panel: int) -> list[Layer]:
    """Circles where it is inside, crosses where it is outside."""
    found: list[Layer] = []
    for is_inside, marker in ((True, Marker.CIRCLE), (False, Marker.CROSS)):
        alike = [(value, standing) for value, standing in run if standing.is_inside == is_inside]
        if alike:
            found.append(
                Points(
                    colour=colour,
                    x=tuple(float(standing.release_number) for _, standing in alike),
                    y=tuple(value for value, _ in alike),
                    marker=marker,
                    size=7.0,
                    panel=panel,
                )
            )
    return found


def _runs(history: History, panel: int) -> list[Drawn]:
    """What is drawn without a gap: a release that did not judge the theory breaks its line."""
    places = [
        (standing.share_of_radius if panel == 0 else standing.entry_level, standing) if standing else None
        for standing in history.standings
    ]
    known = [None if place is None or place[0] is None else (place[0], place[1]) for place in places]
    return [
        tuple(place for place in run if place is not None)
        for is_known, run in groupby(known, key=lambda place: place is not None)
        if is_known
    ]


def _caption(drawn: Sequence[History], judged: int, releases: Sequence[ReleaseSummary]) -> str:
    words = [
        "Above, the distance of each theory from the fit as a part of the 95 % radius: below 1 is in that ball. "
        "Below, its entry level, the smallest level whose ball holds it. Circles are inside and crosses outside, by "
        "the exact p-value, which near the edge can differ from the ball."
    ]
    cautious = sorted(
        {s.release_number for history in drawn for s in history.standings if s and s.is_cautious}
    )
    if cautious:
        words.append(
            f"The radius of release {', '.join(map(str, cautious))} is the cautious one, drawn large on purpose, and "
            "entry levels are those of the calibrated ball: a theory can be below 1 above and beyond 0.95 below."
        )
    if len(drawn) < judged:
        words.append(
            f"{len(drawn)} of {judged} theories have a line: those that moved, then the nearest, unless others are "
            "chosen. The table has all."
        )
    if any(release.is_withdrawn for release in releases):
        words.append(
            "Verdicts on a withdrawn release are drawn where its dotted line stands; they move nobody."
        )
    return " ".join(words)


def _table(histories: Sequence[History]) -> Table:
    rows: list[tuple[Cell, ...]] = []
    for history in histories:
        for release, standing in zip(history.releases, history.standings, strict=True):
            withdrawn = "yes" if release.is_withdrawn else "no"
            if standing is None:
                rows.append((history.theory_name, release.number, withdrawn, *[None] * 6, "not judged"))
                continue
            rows.append(
                (
                    history.theory_name,
                    release.number,
                    withdrawn,
                    standing.version,
                    standing.distance,
                    standing.radius,
                    standing.share_of_radius,
                    standing.entry_level,
                    standing.p_value,
                    standing.word,
                )
            )
    return Table(TABLE_COLUMNS, tuple(rows))
