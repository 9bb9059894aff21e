"""What simulations say of the sets that a result quotes, as a small table and in words."""

from dataclasses import dataclass

from fits.assessments.document import level_key
from fits.engine.coverage.repeats import simulation_error
from fits.reports import numbers
from fits.reports.snapshot import Document, Snapshot

_SETS = {
    "published": "published ball",
    "calibrated": "calibrated ball",
    "cautious": "cautious ball",
    "exact": "exact set",
    "scales": "scale set",
}
_ERRORS = {
    "known": "known errors",
    "estimated": "errors of one size, estimated from the leftover",
    "correlated": "known, correlated errors",
}
# What the simulated errors do not share with those of an assessment.
_UNLIKE = {
    "counts": "The simulated errors were normal; those of counts are so only after their transformation and nearly.",
    "profile": (
        "The simulated errors were of one size; a profile estimated along x is less certain, and with it no set is "
        "exact."
    ),
}
_SPREAD_LEVEL = 0.95


@dataclass(frozen=True)
class HeldRow:
    """One set: for each level how often it held the truth, on average and at worst."""

    name: str
    shares: tuple[tuple[str, str], ...]


@dataclass(frozen=True)
class KnownCoverageTable:
    """The table with what is said around it."""

    caption: str
    levels: tuple[str, ...]
    rows: tuple[HeldRow, ...]
    sentences: tuple[str, ...]


def known_coverage_table(snapshot: Snapshot) -> KnownCoverageTable | None:
    """None for results that were computed before coverage was quoted."""
    known: Document | None = snapshot.detail.get("known_coverage")
    if known is None:
        return None
    return KnownCoverageTable(
        caption=(
            f"Of 100 simulated repeats, n = {known['points']}, {_ERRORS[known['errors']]}: average over "
            f"{known['truths']} kinds of true curve, and the worst of them"
        ),
        levels=tuple(numbers.level_words(level_key(level)) for level in known["levels"]),
        rows=tuple(
            HeldRow(
                _SETS[row["name"]],
                tuple(
                    (f"{100.0 * average:.1f}", f"{100.0 * worst:.1f}")
                    for average, worst in zip(row["average"], row["worst"], strict=True)
                ),
            )
            for row in known["sets"]
        ),
        sentences=_sentences(snapshot, known),
    )


def _sentences(snapshot: Snapshot, known: Document) -> tuple[str, ...]:
    repeats = known["repeats"]
    error = f"{100.0 * simulation_error(_SPREAD_LEVEL, repeats):.1f}"
    errors = snapshot.result["release"]["errors"]
    said = [
        "A set that keeps its word holds the truth as often as its level says. Simulated with engine "
        f"{known['engine']}, {repeats} repeats for each kind of curve, {known['draws']} draws in each, the default "
        "resolution and monotone shrinkage: the setting nearest to this one. Chance alone moves a number near 95 by "
        f"{error}, and makes the worst of {known['truths']} look worse than it is.",
    ]
    if errors == "estimate":
        said.append(
            "The exact and the scale set keep their word whatever n is, unless the data have structure finer than the "
            "resolution: it passes for error, and all sets are then larger than they need be. Where errors of a known "
            "size (shared ones, a calibration) stand beside the estimated one, they keep it nearly. The balls keep it "
            "as nearly as the table shows."
        )
    elif errors not in _UNLIKE:
        said.append(
            "The exact and the scale set keep their word whatever n is; the balls as nearly as the table shows."
        )
    else:
        said.append(_UNLIKE[errors])
    return tuple(said)
