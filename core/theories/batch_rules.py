"""What is to become of each curve of a batch: of which theory it will be, or why it is refused.

Asked when a batch is uploaded, and again, with the rows locked, when it is submitted.
"""

from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from django.db.models import OuterRef, QuerySet, Subquery

from core.errors import UserError
from core.theories.models import Batch, BatchItem, Curve, Theory
from core.theories.rules import refuse_short

UPLOAD_AGAIN = "Upload it again to submit it"
LONGEST_NAME = Theory._meta.get_field("name").max_length or 0


@dataclass(frozen=True)
class Current:
    """A theory that is there, and the newest version of its curve for the measurement, 0 where it has none."""

    theory: Theory
    version: int


def theories_of(batch: Batch, names: Iterable[str]) -> QuerySet[Theory]:
    """Those of these names that the batch would add to: at the same desk, or shared as it is."""
    return Theory.objects.filter(
        collaboration=batch.collaboration_id, desk=batch.desk_id, name__in=set(names)
    )


def current_of(batch: Batch, theories: QuerySet[Theory]) -> dict[str, Current]:
    """By the name of the theory. One query."""
    versions = newest_curves(batch).filter(theory=OuterRef("pk")).values("version")[:1]
    rows = theories.select_related("collaboration", "submitted_by", "desk").annotate(
        newest=Subquery(versions)
    )
    return {theory.name: Current(theory, theory.newest or 0) for theory in rows}


def newest_curves(batch: Batch) -> QuerySet[Curve]:
    """The submitted curves for the measurement of the batch, newest versions first."""
    curves = Curve.objects.filter(measurement=batch.measurement_id, state=Curve.State.SUBMITTED)
    return curves.order_by("-version")


def refuse_names(items: list[BatchItem]) -> None:
    """Mark those whose name cannot be that of a theory, or is that of several."""
    count = Counter(item.name for item in items if item.name)
    for item in items:
        if not item.name:
            mark(item, UserError("name-missing", "it has no name", "Name it in the first line of the table"))
        elif len(item.name) > LONGEST_NAME:
            reason = f"its name has {len(item.name)} characters, of at most {LONGEST_NAME}"
            mark(item, UserError("name-too-long", reason, "Shorten it"))
        elif count[item.name] > 1:
            reason = f"{count[item.name]} curves of this upload have this name"
            mark(item, UserError("name-twice", reason, "Keep one, or give each a name of its own"))


def refuse_uncovered(batch: Batch, items: list[BatchItem]) -> None:
    """Mark those that do not reach over the stretch announced for a sealed measurement."""
    for item in items:
        if item.x_min is None or item.x_max is None:
            continue
        try:
            refuse_short(batch.measurement, item.x_min, item.x_max)
        except UserError as error:
            mark(item, error)


def seen_now(batch: Batch) -> dict[int, int]:
    """What the page of the batch shows of each accepted item, by its place: the key of the theory that gets a new
    version, 0 for a new theory."""
    accepted = dict(batch.items.filter(refusal_code="").values_list("order", "name"))
    current = current_of(batch, theories_of(batch, accepted.values()))
    return {order: current[name].theory.pk if name in current else 0 for order, name in accepted.items()}


def refuse_unseen(items: list[BatchItem], current: dict[str, Current], seen: Mapping[int, int]) -> None:
    """Mark those that would become something else than their reader saw: the theory of this name was renamed, removed
    or added since."""
    for item in items:
        known, shown = current.get(item.name), seen.get(item.order)
        if shown == (known.theory.pk if known else 0):
            continue
        if known:
            refuse_appeared(item, known.theory)
        else:
            reason = "the theory of this name that you saw is there no more, or has another name"
            mark(item, UserError("theory-gone", reason, f"{UPLOAD_AGAIN} as a new theory"))


def refuse_appeared(item: BatchItem, theory: Theory) -> None:
    """Mark what was not shown as a version of the theory that has its name now."""
    reason = f"a theory of {theory.submitted_by} has come to have this name since you looked"
    mark(item, UserError("theory-appeared", reason, f"{UPLOAD_AGAIN} as a version of that theory"))


def refuse_nothing_new(batch: Batch, items: list[BatchItem], current: dict[str, Current]) -> None:
    """Mark those that are, number by number, the newest version of their theory. Tables are fetched only of curves
    that agree in length and range."""
    there = {
        current[item.name].theory.pk: item for item in items if item.is_accepted and item.name in current
    }
    newest: dict[int, Curve] = {}
    for curve in newest_curves(batch).filter(theory__in=list(there)).defer("table"):
        newest.setdefault(curve.theory_id, curve)
    alike = {
        curve.pk: there[theory] for theory, curve in newest.items() if _shape(curve) == _shape(there[theory])
    }
    for key, table in Curve.objects.filter(pk__in=list(alike)).values_list("pk", "table"):
        item = alike[key]
        if item.table is not None and bytes(table) == bytes(item.table):
            version = current[item.name].version
            reason = f"it is the same, number by number, as version {version}, the newest"
            mark(item, UserError("nothing-new", reason, "Nothing needs to be done"))


def _shape(row: Curve | BatchItem) -> tuple[int | None, float | None, float | None]:
    return row.points, row.x_min, row.x_max


def mark(item: BatchItem, error: UserError) -> None:
    """Refuse the item, for the first reason that there is."""
    if item.is_accepted:
        item.refusal_code, item.refusal, item.table = error.code, str(error), None
