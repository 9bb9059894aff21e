"""The register of a measurement that is or was sealed: which curve was submitted by whom and when, with its hash."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import UTC, datetime

from core.measurements.export import cell
from core.measurements.models import Measurement
from core.measurements.seal_page import SealPage, seal_of
from core.people.access import Someone, seen_by
from core.theories.models import Curve

IN_TIME = "before the data were open"
BEFORE_SEALED = "before it was sealed"
LATE = "after the deadline"
DATA_OPEN = "after the data were open"
HAD_LOOKED = "its submitter had seen the data"
COLUMNS = ("theory", "version", "submitted by", "at (UTC)", "SHA-256 of the file", "came", "note")


@dataclass(frozen=True)
class Registered:
    """A curve of the register. `came`: beside the deadline and the opening; `had_looked`: whether who submitted it
    was shown the data before."""

    curve: Curve
    came: str
    had_looked: bool

    @property
    def note(self) -> str:
        """What is to be known of it beside its time."""
        return HAD_LOOKED if self.had_looked else ""


@dataclass(frozen=True)
class RegisterPage:
    """The seal and the curves, as far as the reader may see them, in the order in which they came."""

    seal: SealPage
    curves: Sequence[Registered]


def register_page(measurement: Measurement, reader: Someone) -> RegisterPage:
    """Gathered in a few queries, whatever there is."""
    seal = seal_of(measurement, reader)
    first_looks = {look.user_id: look.at for look in seal.looks}
    submitted = Curve.objects.filter(measurement=measurement, state=Curve.State.SUBMITTED)
    curves = (
        seen_by(submitted, reader)
        .select_related("theory", "submitted_by")
        .defer("table")
        .order_by("submitted_at", "pk")
    )
    return RegisterPage(
        seal=seal,
        curves=tuple(
            Registered(
                curve=curve,
                came=_came(measurement, curve.submitted_at),
                had_looked=_is_before(first_looks.get(curve.submitted_by_id), curve.submitted_at),
            )
            for curve in curves
        ),
    )


def csv_lines(page: RegisterPage) -> Iterator[str]:
    """The curves of the register as CSV, safe to open in a spreadsheet."""
    yield _row(*COLUMNS)
    for line in page.curves:
        curve = line.curve
        at = curve.submitted_at.astimezone(UTC).isoformat(timespec="seconds") if curve.submitted_at else ""
        yield _row(
            curve.theory.name,
            str(curve.version),
            str(curve.submitted_by),
            at.replace("+00:00", "Z"),
            curve.file_sha256,
            line.came,
            line.note,
        )


def _came(measurement: Measurement, at: datetime | None) -> str:
    assert measurement.sealed_at is not None
    opened, deadline = measurement.opened, measurement.curves_until
    if at is None or at < measurement.sealed_at:
        return BEFORE_SEALED
    if opened is not None and at >= opened:
        return DATA_OPEN
    return LATE if deadline is not None and at > deadline else IN_TIME


def _is_before(looked: datetime | None, submitted: datetime | None) -> bool:
    return looked is not None and submitted is not None and looked <= submitted


def _row(*words: str) -> str:
    return ",".join(cell(word) for word in words) + "\r\n"
