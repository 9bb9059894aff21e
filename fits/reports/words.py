"""The finding in one sentence, made from the numbers: never vaguer and never bolder than they are."""

from collections.abc import Sequence
from itertools import pairwise

from fits.reports import numbers
from fits.reports.snapshot import Document, Snapshot


def finding(snapshot: Snapshot, level: str) -> str:
    """One sentence: how many stay inside at this level, which is closest, and what is unsettled about that. Where some
    curves are not shown it speaks of those that are, and says so."""
    inside = [curve for curve in snapshot.curves if snapshot.inside(curve)[level]]
    total = len(snapshot.curves)
    one, many = nouns(snapshot)
    shown, these = "", ""
    if hidden := snapshot.hidden:
        one, many = f"{one} shown", f"{many} shown"
        shown, these = f", of {total + hidden} judged,", " of these"
    where = f"the {numbers.level_words(level)} set of {data_name(snapshot)}"
    first = snapshot.curves[0]
    name = f"{first['name']}, rank {first['rank']} of {total + hidden}" if hidden else first["name"]
    at = f"{numbers.significant(first['distance'])} error bars from the fit"
    if total == 1:
        verb = "stays inside" if inside else "is outside"
        return (
            f"The one {one}{shown or ','} {name}, {verb} {where}, at {at}{_broad(snapshot, inside, level)}."
        )
    if not inside:
        start = f"None of the {total} {many}{shown}" if shown else f"None of {total} {many}"
        start += f" stays inside {where}"
    elif len(inside) == total:
        start = (
            f"All {total} {many}{shown} stay inside {where}, which rules none of {these[4:] or 'them'} out"
        )
    else:
        start = f"Of {'the ' if shown else ''}{total} {many}{shown or ','} {len(inside)} "
        start += f"{'stays' if len(inside) == 1 else 'stay'} inside {where}"
    broad = _broad(snapshot, inside, level)
    return f"{start}{broad}; the closest{these} is {name}, at {at}{_order(snapshot)}."


def shown_words(snapshot: Snapshot) -> str:
    """How many of the curves that were judged are shown; empty where all are."""
    if not snapshot.hidden:
        return ""
    shown, total = len(snapshot.curves), len(snapshot.curves) + snapshot.hidden
    _, many = nouns(snapshot)
    return f"{shown} of the {total} {many} of this assessment are shown; ranks are among all {total}."


def nouns(snapshot: Snapshot) -> tuple[str, str]:
    """Theories, where each curve is known to be of another one; else curves."""
    if known := snapshot.context.get("nouns"):
        return known[0], known[1]
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
    settled = {(pair["first"], pair["second"]): pair["settled"] for pair in snapshot.detail["neighbours"]}
    unsettled = 0
    for pair in pairwise(snapshot.names):
        # Between these two stands one that is not shown: whether their own order is settled was not asked.
        if pair not in settled and not unsettled:
            return ", but whether the data settle the order of the first two shown was not judged"
        if settled.get(pair, True):
            break
        unsettled += 1
    if not unsettled:
        return ""
    if unsettled == 1:
        return ", but the order of the first two is not settled by the data"
    return f", but the order of the first {unsettled + 1} is not settled by the data"


def meaning(*widths: str) -> tuple[str, ...]:
    """What "inside" says and does not say of results whose narrowest features judged are these; nothing of none."""
    if not widths:
        return ()
    judged = (
        f"Only features wider than {widths[0]} were judged, the resolution chosen beforehand."
        if len(set(widths)) == 1
        else "Only features wider than the resolution were judged, which was chosen beforehand and is given with each "
        "result."
    )
    return (
        "Inside means: not ruled out by these data at this level. It never means proved. Several curves that "
        "contradict one another can be inside together, and a curve that nobody thought of may fit as well.",
        "The ball speaks of all curves at once: the chance that the true curve is outside the 95 % set is 5 % "
        "however many curves are tried, so no correction for many theories is due.",
        f"{judged} What is finer was neither confirmed nor refuted.",
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
