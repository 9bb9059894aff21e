"""How many peaks the data demand, in one sentence: no vaguer and no bolder than the two bounds allow."""

from fits.reports import numbers
from fits.reports.features.document import Features, Kind, Standing, Step


def count_sentence(features: Features, level: str, kind: Kind) -> str:
    """At least so many, and why no more; where the bounds lie on either side of the radius, that it is undecided."""
    steps, radius = features.steps(kind), features.radius(level)
    at = numbers.level_words(level)
    if not steps:
        return f"How many {kind}s the data demand was not computed."
    if radius == 0.0:
        return (
            f"At {at} the radius is 0: the data lie closer to the fit than their errors allow, so that nothing can be "
            "said of a number. Check the errors."
        )
    demanded = next(
        (k for k, step in enumerate(steps) if step.standing(radius) is not Standing.RULED_OUT), None
    )
    if demanded is None:
        last = steps[-1].at_most
        return f"At {at} the data demand at least {_number(last + 1, kind)}; whether they demand more was not computed."
    start = f"At {at} the data demand " + (
        f"at least {_number(demanded, kind)}" if demanded else f"no {kind}"
    )
    first = steps[demanded]
    if first.standing(radius) is Standing.POSSIBLE:
        why = _witness(first, radius, kind)
        return f"{start}: {why}." if not demanded else f"{start}; {_next(demanded)} is not demanded: {why}."
    return f"{start}; {_undecided(steps[demanded:], radius, kind)}."


def thinning_sentence(features: Features) -> str:
    """By how much the lower bounds may fall short; empty where nothing was pooled."""
    thinning = features.part("count_thinning")
    if not thinning:
        return ""
    return (
        "So many points were pooled with their neighbours for the lower bounds, which may fall short by up to "
        f"{numbers.significant(thinning, 2)} error bars for that: a count may be too low by it, never too high."
    )


def _undecided(steps: tuple[Step, ...], radius: float, kind: Kind) -> str:
    first = steps[0]
    words = (
        f"whether {_next(first.at_most)} is demanded is undecided: a curve {_with(first.at_most, kind)} lies "
    )
    if first.upper is None:
        lower, written = numbers.apart(first.lower, radius)
        words += f"at least {lower} error bars from the fit, the radius is {written}, and none could be constructed"
    else:
        _, written = numbers.apart(first.upper, radius)
        bounds = f"{numbers.apart(first.lower, radius)[0]} and {numbers.apart(first.upper, radius)[0]}"
        words += f"between {bounds} error bars from the fit, the radius is {written}"
    possible = next((step for step in steps if step.standing(radius) is Standing.POSSIBLE), None)
    if possible is None:
        return words
    return f"{words}; {_next(possible.at_most)} is not demanded: {_witness(possible, radius, kind)}"


def _witness(step: Step, radius: float, kind: Kind) -> str:
    """Why no more is demanded: a curve within the radius that does with so many."""
    if step.upper == 0.0:
        return f"the fit itself has {_number(step.at_most, kind) if step.at_most else 'none'}"
    assert step.upper is not None
    price, written = numbers.apart(step.upper, radius)
    return f"a curve {_with(step.at_most, kind)} lies {price} error bars from the fit, inside the radius of {written}"


def _with(most: int, kind: Kind) -> str:
    return f"with at most {_number(most, kind)}" if most else f"without {kind}s"


def _next(count: int) -> str:
    word = numbers.ordinal(count + 1)
    return f"an {word}" if word[0] == "e" else f"a {word}"


def _number(count: int, kind: Kind) -> str:
    return f"{count} {kind}" if count == 1 else f"{count} {kind}s"
