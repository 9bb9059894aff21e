"""What the page of a batch shows: each curve of it, what becomes of it, and the accepted ones over the data."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from core.measurements.error_preview import error_preview
from core.measurements.models import Release
from core.measurements.preview_figure import PreviewFigure, Series, preview_figure
from core.measurements.reading.stored import from_bytes
from core.measurements.stored_release import data_to_draw
from core.people.access import sees_data
from core.people.models import User
from core.theories.batch_rules import Current, current_of, theories_of
from core.theories.models import Batch, BatchItem, Curve, Theory

# More lines than this cannot be told apart, nor more points of one.
MAXIMUM_LINES = 20
POINTS_A_LINE = 300


@dataclass(frozen=True)
class BatchRow:
    """A curve of the batch. `theory` is the one that is there and gets the version, None for a new one; `curve` what
    was submitted."""

    item: BatchItem
    theory: Theory | None
    version: int
    curve: Curve | None


@dataclass(frozen=True, eq=False)
class BatchPage:
    """The rows in their order; `figure` only while there is something to decide."""

    rows: tuple[BatchRow, ...]
    accepted: int
    figure: PreviewFigure | None
    release: Release | None
    lines: int

    @property
    def seen(self) -> str:
        """What the form carries: of each accepted curve its place and what becomes of it."""
        return " ".join(
            f"{row.item.order}:{row.theory.pk if row.theory else 0}"
            for row in self.rows
            if row.item.is_accepted
        )

    @property
    def refused(self) -> int:
        return len(self.rows) - self.accepted

    @property
    def words(self) -> str:
        """What is drawn."""
        which = (
            "the accepted curves"
            if self.lines == self.accepted
            else f"the first {self.lines} accepted curves"
        )
        return f"{which}, and the data with bars of one standard error." if self.release else f"{which}."


def batch_page(batch: Batch, reader: User) -> BatchPage:
    """Everything on the page. The number of queries does not hang on how many curves there are."""
    items = list(batch.items.defer("table").select_related("curve__theory").defer("table", "curve__table"))
    accepted = [item for item in items if item.is_accepted]
    waiting = batch.submitted_at is None
    current = current_of(batch, theories_of(batch, [item.name for item in accepted])) if waiting else {}
    figure, release, lines = None, None, 0
    if waiting and accepted:
        drawn = _series(batch, accepted[:MAXIMUM_LINES])
        release = _newest(batch, reader)
        figure, lines = _figure(batch, release, drawn), len(drawn)
    return BatchPage(
        rows=tuple(_row(item, current.get(item.name)) for item in items),
        accepted=len(accepted),
        figure=figure,
        release=release,
        lines=lines,
    )


def _row(item: BatchItem, current: Current | None) -> BatchRow:
    if current is None:
        return BatchRow(item, None, 1, item.curve)
    return BatchRow(item, current.theory, current.version + 1, item.curve)


def _newest(batch: Batch, reader: User) -> Release | None:
    if not sees_data(reader, batch.measurement):
        return None
    published = batch.measurement.releases.filter(state=Release.State.PUBLISHED)
    return published.select_related("measurement").order_by("-number").first()


def _series(batch: Batch, items: Sequence[BatchItem]) -> list[Series]:
    tables = dict(batch.items.filter(pk__in=[item.pk for item in items]).values_list("pk", "table"))
    drawn = []
    for item in items:
        if (stored := tables.get(item.pk)) is None:
            continue
        table = from_bytes(stored)
        kept = np.unique(np.linspace(0, len(table) - 1, POINTS_A_LINE).round().astype(np.int64))
        drawn.append(Series(item.name, table[kept, 0], table[kept, 1]))
    return drawn


def _figure(batch: Batch, release: Release | None, drawn: Sequence[Series]) -> PreviewFigure:
    data = None if release is None else data_to_draw(release)
    return preview_figure(
        batch.measurement,
        data,
        None if data is None else error_preview(data).standard_errors,
        data_name=str(release) if release else "",
        curves=drawn,
    )
