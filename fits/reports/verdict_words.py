"""What is said beside a verdict where the four sets disagree, and of the leftover."""

from collections.abc import Iterator

from fits.assessments.notes import LEFTOVER_TOO_LARGE, LEFTOVER_TOO_SMALL
from fits.reports import numbers
from fits.reports.snapshot import Document, Snapshot

BORDERLINE = 2.0  # simulation errors


def sided(is_inside: bool) -> str:
    """Inside or outside."""
    return "inside" if is_inside else "outside"


def explanations(snapshot: Snapshot, curve: Document, level: str) -> tuple[str, ...]:
    """Each disagreement of the published, calibrated, exact and scale sets at a level, and why."""
    return (*_balls(snapshot, curve, level), *_scales(snapshot, curve, level), *_borderline(curve, level))


def _balls(snapshot: Snapshot, curve: Document, level: str) -> Iterator[str]:
    sets, at = curve["inside"], numbers.level_words(level)
    exact = sets["exact"][level]
    if sets["published"][level] is not exact:
        yield (
            f"The published ball says {sided(not exact)} at {at}, the exact p-value {sided(exact)}: the published "
            "radius is right for large n only."
        )
    if snapshot.radius_kind == "cautious":
        if (curve["distance"] <= snapshot.radius(level)) is not exact:
            yield (
                f"The cautious ball says {sided(not exact)} at {at}, the exact p-value {sided(exact)}: the radius is "
                "drawn large on purpose, for any curve, the p-value is simulated around this one, and it counts."
            )
    elif sets["calibrated"][level] is not exact:
        yield (
            f"The calibrated ball says {sided(not exact)} at {at}, the exact p-value {sided(exact)}: the radius is "
            "calibrated around the fit, the p-value around this curve itself, and the p-value counts."
        )


def _scales(snapshot: Snapshot, curve: Document, level: str) -> Iterator[str]:
    exact, scales = curve["inside"]["exact"][level], curve["inside"]["scales"][level]
    if exact and not scales:
        yield f"Inside, but off at {worst_scale(snapshot, curve)}: {_why_off(snapshot, curve)}."
    if scales and not exact:
        yield (
            "The scale set still holds it: no misfit summed from the broadest features on is large enough by itself. "
            "The ball is the sharper of the two where a misfit is spread over many features."
        )


def _why_off(snapshot: Snapshot, curve: Document) -> str:
    """A misfit that takes all functions to show is neither broad nor steady."""
    if curve["scales"]["worst"]["functions"] < snapshot.result["fit"]["resolution"]:
        return "a small, steady misfit that the ball is blind to"
    return (
        "a misfit of all features together, which the ball, made around the shrunken fit, does not rule out"
    )


def _borderline(curve: Document, level: str) -> Iterator[str]:
    gap = abs(curve["p_value"] - (1.0 - float(level)))
    if gap < BORDERLINE * curve["p_value_error"]:
        yield (
            f"The p-value lies within its simulation error of {numbers.percent(round(1.0 - float(level), 12))}: more "
            f"draws would settle this verdict at {numbers.level_words(level)}."
        )


def worst_scale(snapshot: Snapshot, curve: Document) -> str:
    """The worst scale of a curve: "features wider than 0.4 cycles per hour"."""
    worst = curve["scales"]["worst"]
    # The first function is constant: nothing but the level.
    if worst["functions"] == 1:
        return "its overall level"
    width = numbers.width(worst["wider_than"], unit=snapshot.x_unit, log=snapshot.on_log_axis)
    return f"features wider than {width}"


def leftover(snapshot: Snapshot) -> tuple[str, ...]:
    """The leftover check, with both readings."""
    found = snapshot.result["leftover"]
    if found is None:
        sigma = snapshot.result["release"].get("sigma")
        if sigma is not None:
            return (
                f"The errors were estimated from what the judged features leave over (σ = "
                f"{numbers.significant(sigma)}), so the leftover cannot check them as well.",
            )
        return (
            "As many functions as points: nothing is left over to check the errors by, and errors that are 10 % "
            "off would move the ball by its own size.",
        )
    p = float(found["p_value"])
    written = numbers.p_value(p)
    numbers_found = (
        f"χ² = {numbers.significant(found['chi2'], 4)} on {found['dof']} degrees of freedom, p = {written}"
    )
    if p < LEFTOVER_TOO_LARGE:
        verdict = "more than the errors allow"
    elif p > LEFTOVER_TOO_SMALL:
        verdict = "less than the errors say"
    elif p < 0.05 or p > 0.95:
        verdict = (
            f"rather {'more' if p < 0.05 else 'less'} than the errors say, as by chance in 1 of 20 repeats"
        )
    else:
        verdict = "about as much as the errors say"
    return (
        f"What the judged features leave over scatters {verdict} ({numbers_found}).",
        "A small p has two readings: there is structure finer than the resolution, or the errors are understated. "
        "A p near 1 also has two: the errors are overstated, or correlated in a way that they do not say.",
    )
