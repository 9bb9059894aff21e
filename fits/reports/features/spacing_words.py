"""What the data say of evenly spaced peaks, in words."""

from fits.reports import numbers
from fits.reports.features.document import Features, Interval
from fits.reports.snapshot import Document


def spacing_sentence(features: Features, level: str, unit: str) -> str:
    """Even spacing with any start."""
    if features.spacing is None:
        return (
            "Even spacing is asked of three peaks or more that cost more to level than every radius; here there are "
            "fewer."
        )
    return _sentence(features, features.spacing, level, unit, "even spacing", "evenly spaced series")


def harmonic_sentence(features: Features, level: str, unit: str) -> str:
    """Peaks at whole multiples of one number."""
    if features.harmonic is None:
        return ""
    names = "a harmonic series, peaks at whole multiples of the spacing,", "harmonic series"
    return _sentence(features, features.harmonic, level, unit, *names)


def unsolved_places(profile: Document, level: str, key: str) -> int:
    """How many prices are missing because a programme could not be solved: such places are never ruled out, so that
    they lie in the intervals; where no curve does what is asked, none does, and the place is ruled out."""
    stretches = [Interval(*map(float, pair)) for pair in profile["interval"][level]]
    prices = zip(profile[key], profile["price"], strict=True)
    return sum(price is None and any(part.holds(x) for part in stretches) for x, price in prices)


def in_words(stretches: list[Interval], unit: str) -> str:
    """ "0.61 to 0.65 or 0.70 to 0.71 cycles per hour"."""
    widest = max(part.high - part.low for part in stretches)
    words = " or ".join(numbers.interval(part.low, part.high, span=widest) for part in stretches)
    return f"{words} {unit}".strip()


def _sentence(features: Features, found: Document, level: str, unit: str, name: str, series: str) -> str:
    at, radius = numbers.level_words(level), features.radius(level)
    stretches = [Interval(*map(float, pair)) for pair in found["interval"][level]]
    known = [
        (price, x) for x, price in zip(found["spacing"], found["price"], strict=True) if price is not None
    ]
    searched = numbers.interval(found["spacing"][0], found["spacing"][-1])
    looked = f" (spacings looked at: {f'{searched} {unit}'.strip()})"
    missing = unsolved_places(found, level, "spacing")
    unsolved = f" {_unsolved(missing)}" if missing else ""
    if stretches:
        return f"At {at} {name} is not ruled out, with a spacing of {in_words(stretches, unit)}{looked}.{unsolved}"
    if not known:
        return f"At {at} {name} is rejected: no curve has it{looked}."
    price, x = min(known)
    cost, written = numbers.apart(price, radius)
    outside = f"{cost} error bars from the fit, outside the radius of {written}{looked}"
    if price > features.largest_radius:
        # Far above the radii the engine gives lower bounds, of which the smallest need not be the nearest series.
        return f"At {at} {name} is rejected: every {series} lies at least {outside}."
    apart = f"{numbers.significant(x)} {unit}".strip()
    return f"At {at} {name} is rejected: the nearest {series}, {apart} apart, lies {outside}."


def _unsolved(count: int) -> str:
    spacings, them = ("one spacing", "it") if count == 1 else (f"{count} spacings", "them")
    return f"For {spacings} the programme could not be solved, which does not rule {them} out."
