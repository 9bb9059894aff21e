"""The finding in one sentence, made from the numbers: never vaguer and never bolder than they are."""

from collections.abc import Sequence

from fits.reports import numbers
from fits.reports.snapshot import Document, Snapshot


def finding(snapshot: Snapshot, level: str) -> str:
    """One sentence: how many stay inside at this level, which is closest, and what is unsettled about that."""
    inside = [curve for curve in snapshot.curves if snapshot.inside(curve)[level]]
    total = len(snapshot.curves)
    one, many = nouns(snapshot)
    where = f"the {numbers.level_words(level)} set of {data_name(snapshot)}"
    first = snapshot.curves[0]
    at = f"{numbers.significant(first['distance'])} error bars from the fit"
    if total == 1:
        verb = "stays inside" if inside else "is outside"
        return f"The one {one}, {first['name']}, {verb} {where}, at {at}{_broad(snapshot, inside, level)}."
    if not inside:
        start = f"None of {total} {many} stays inside {where}"
    elif len(inside) == total:
        start = f"All {total} {many} stay inside {where}, which rules none of them out"
    else:
        start = f"Of {total} {many}, {len(inside)} {'stays' if len(inside) == 1 else 'stay'} inside {where}"
    return f"{start}{_broad(snapshot, inside, level)}; the closest is {first['name']}, at {at}{_order(snapshot)}."


def nouns(snapshot: Snapshot) -> tuple[str, str]:
    """Theories, where each curve is known to be of another one; else curves."""
    theories = [snapshot.origin(name).get("theory") for name in snapshot.names]
    if all(theories) and len(set(theories)) == len(theories):
        return "theory", "theories"
    return "curve", "curves"


def data_name(snapshot: Snapshot) -> str:
    """How the data are called: "release 3", or the name of the file."""
    release = snapshot.context.get("release") or {}
    if release.get("number"):
        return f"release {release['number']}"
    return release.get("file_name") or "these data"


def listing(names: Sequence[str]) -> str:
    """ "A", "A and B", "A, B and C"."""
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def _broad(snapshot: Snapshot, inside: Sequence[Document], level: str) -> str:
    """The curves that the ball admits and the scale set rejects."""
    off = [curve["name"] for curve in inside if not curve["inside"]["scales"][level]]
    if not off:
        return ""
    if len(snapshot.curves) == 1:
        return ", but the scale set rejects it"
    named = listing(off) if len(off) <= 2 else f"{len(off)} of them"
    return f", though the scale set rejects {named}"


def _order(snapshot: Snapshot) -> str:
    """Whether the data settle who is first."""
    pairs = snapshot.detail["neighbours"]
    unsettled = 0
    while unsettled < len(pairs) and not pairs[unsettled]["settled"]:
        unsettled += 1
    if not unsettled:
        return ""
    if unsettled == 1:
        return ", but the order of the first two is not settled by the data"
    return f", but the order of the first {unsettled + 1} is not settled by the data"


def meaning(snapshot: Snapshot) -> tuple[str, ...]:
    """What "inside" says and does not say."""
    return (
        "Inside means: not ruled out by these data at this level. It never means proved. Several curves that "
        "contradict one another can be inside together, and a curve that nobody thought of may fit as well.",
        "The ball speaks of all curves at once: the chance that the true curve is outside the 95 % set is 5 % "
        "however many curves are tried, so no correction for many theories is due.",
        f"Only features wider than {resolution_width(snapshot)} were judged, the resolution chosen beforehand. What "
        "is finer was neither confirmed nor refuted.",
        "All of this stands on the errors being right: errors stated too small put true curves outside, errors "
        "stated too large let wrong ones in. The leftover check above is the test of that which the data allow.",
    )


CAUTION = (
    "Where a decision that rests on this could hurt someone, check it by the codes of the field and with people "
    "qualified in it. A statistical verdict on a curve is not a safety assessment."
)


def resolution_width(snapshot: Snapshot) -> str:
    """The narrowest feature judged, 2 (b − a)/J, in words."""
    # Width times number of functions is the same for all scales of all curves.
    scale = snapshot.curves[0]["scales"]["worst"]
    whole = float(scale["wider_than"]) * float(scale["functions"])
    width = whole / float(snapshot.result["fit"]["resolution"])
    return numbers.width(width, unit=snapshot.x_unit, log=snapshot.on_log_axis)
