"""A result without some of its curves: nothing of these is left in it, and nothing else is changed."""

import math
from collections.abc import Collection, Iterable
from typing import Any

from fits.assessments.notes import FINER_THAN_RESOLUTION, GRID_TOO_COARSE, NoteCode
from fits.reports.snapshot import Document, Snapshot
from fits.reports.words import nouns

# Stands for a neighbour in rank that is not shown.
NOT_SHOWN = "the next in rank, which is not shown,"


def narrowed(snapshot: Snapshot, shown: Collection[str] | None) -> Snapshot:
    """The snapshot with these curves alone. Ranks stay as they were, and it says how many there were.

    None, or all of them: the snapshot itself.
    """
    if shown is None or set(snapshot.names) <= set(shown):
        return snapshot
    kept = set(shown) & set(snapshot.names)
    curves = _of(kept, snapshot.result["curves"])
    result = {**snapshot.result, "curves": curves, "curves_judged": len(snapshot.names)}
    result["notes"] = [note for note in map(_Notes(result).told, snapshot.result["notes"]) if note]
    detail = {
        **snapshot.detail,
        "curves": _of(kept, snapshot.detail["curves"]),
        "neighbours": _neighbours(kept, snapshot.detail["neighbours"]),
    }
    context = {
        **snapshot.context,
        "curves": _of(kept, snapshot.context.get("curves") or []),
        "hidden": len(snapshot.names) - len(kept),
        "nouns": list(nouns(snapshot)),
    }
    features = snapshot.features and {
        **snapshot.features,
        "theories": _of(kept, snapshot.features.get("theories") or []),
    }
    return Snapshot(result, detail, context, features)


def _of(kept: Collection[str], documents: Iterable[Document]) -> list[Document]:
    return [document for document in documents if document["name"] in kept]


def _neighbours(kept: Collection[str], pairs: Iterable[Document]) -> list[Document]:
    """Pairs whose first is shown; the other may have lost its name."""
    return [
        {**pair, "second": pair["second"] if pair["second"] in kept else NOT_SHOWN}
        for pair in pairs
        if pair["first"] in kept
    ]


class _Notes:
    """Two notes name curves: they are told anew of those that are shown, or not at all."""

    def __init__(self, result: dict[str, Any]) -> None:
        points = result["release"]["points"]
        self.sizes = {
            NoteCode.CURVE_FINER: {
                curve["name"]: size
                for curve in result["curves"]
                if (size := _unjudged(curve["leftover"], points)) > FINER_THAN_RESOLUTION
            },
            NoteCode.GRID_COARSE: {
                curve["name"]: curve["interpolation_error"]
                for curve in result["curves"]
                if curve["interpolation_error"] > GRID_TOO_COARSE
            },
        }

    def told(self, note: Document) -> Document | None:
        code = note["code"]
        if code not in self.sizes:
            return note
        named = "; ".join(f"{name}, {size:.2g}" for name, size in self.sizes[code].items())
        if not named:
            return None
        before, by, _ = str(note["message"]).partition(": ")
        end = " Give it on a finer grid." if code == NoteCode.GRID_COARSE else ""
        return {**note, "message": f"{before}{by}{named}.{end}"}


def _unjudged(leftover: Document | None, points: int) -> float:
    if leftover is None or leftover["chi2"] <= math.sqrt(2.0 * leftover["dof"]):
        return 0.0
    return math.sqrt(leftover["chi2"] / points)
