"""How numbers are written: never more digits than are known, never a zero that is only small."""

import math


def significant(value: float, digits: int = 3) -> str:
    """Rounded to so many digits, without an exponent where that is readable."""
    if value == 0.0:
        return "0"
    exponent = math.floor(math.log10(abs(float(f"{value:.{digits - 1}e}"))))
    if -4 <= exponent < 6:
        return f"{value:.{max(0, digits - 1 - exponent)}f}".replace("-", "−")
    return f"{value:.{digits - 1}e}".replace("-", "−")


def p_value(value: float, error: float | None = None, *, smallest: float | None = None) -> str:
    """A p-value with its simulation error: "0.091 ± 0.006".

    smallest  the least that the simulation can give: at it only a bound is known, "< 0.0005"
    """
    if smallest is not None and value <= smallest * (1.0 + 1e-9):
        bound = ceiling(smallest)
        return f"{'<' if smallest < float(bound) else '≤'} {bound}"
    if error is None or error == 0.0:
        return f"{value:.3f}" if value >= 0.01 else significant(value, 2)
    # One digit of the error, two where that digit is a one.
    exponent = math.floor(math.log10(error))
    digits = -exponent + (1 if error / 10**exponent < 1.95 and exponent > -4 else 0)
    places = min(max(digits, 2), 6)
    return f"{value:.{places}f} ± {error:.{places}f}"


def ceiling(value: float) -> str:
    """Rounded up to one digit, as a bound is."""
    exponent = math.floor(math.log10(value) + 1e-12)
    digit = math.ceil(value / 10**exponent - 1e-9)
    if digit == 10:
        digit, exponent = 1, exponent + 1
    return f"{digit * 10.0**exponent:.{max(0, -exponent)}f}"


def smallest_p_value(draws: int) -> float:
    """1/(B + 1): what is left when no simulated repeat is as far off."""
    return 1.0 / (draws + 1.0)


def percent(share: float, *, places: int = 0) -> str:
    """A share as "95 %"."""
    text = f"{100.0 * share:.{places}f}" if places else f"{100.0 * share:.6g}"
    return f"{text} %"


def entry_level(level: float, *, draws: float = math.inf) -> str:
    """The smallest level whose ball holds a curve; 0 and 1 are only what the simulation or rounding leave.

    draws  of the simulation that it comes from: fewer than 1000 cannot tell it from 0 or 1 to a tenth of a percent
    """
    bound = math.ceil(1000.0 * max(0.001, 1.0 / draws) - 1e-9) / 1000.0
    if level < bound - 1e-12:
        return f"< {percent(bound, places=1)}"
    if level > 1.0 - bound + 1e-12:
        return f"> {percent(1.0 - bound, places=1)}"
    return percent(level, places=1)


def level_words(level: str) -> str:
    """ "0.95" as "95 %"."""
    return percent(float(level))


def width(value: float, *, unit: str = "", log: bool = False) -> str:
    """The width of a feature: in units of x, or as a factor on a log axis."""
    if log:
        return f"a factor of {significant(math.exp(value))}" if value < 20.0 else "the whole range"
    return f"{significant(value)} {unit}".strip()


def interval(low: float, high: float, *, span: float | None = None) -> str:
    """ "63.1 to 68.9": to a twentieth of its width or better, rounded outwards, so that it is never narrower.

    span  the width by which the digits are chosen, where several intervals stand side by side
    """
    span = high - low if span is None else span
    if not span > 0.0:
        return significant(low, 4)
    places = 1 - math.floor(math.log10(span / 2.0))
    largest = max(abs(low), abs(high))
    if places > 6 and largest < 1e-3:
        digits = math.floor(math.log10(largest)) + places + 1
        return f"{significant(low, digits)} to {significant(high, digits)}"
    places = max(0, places)
    unit = 10.0**places
    bottom, top = math.floor(low * unit + 1e-9) / unit, math.ceil(high * unit - 1e-9) / unit
    return f"{_fixed(bottom, places)} to {_fixed(top, places)}"


def apart(first: float, second: float) -> tuple[str, str]:
    """Two numbers with as many digits as it takes to tell them apart, three at least."""
    for digits in range(3, 8):
        written = significant(first, digits), significant(second, digits)
        if written[0] != written[1]:
            break
    return written


def ordinal(number: int) -> str:
    """ "third", as it is said."""
    words = ("first", "second", "third", "fourth", "fifth", "sixth", "seventh", "eighth", "ninth", "tenth")
    return words[number - 1] if 1 <= number <= len(words) else f"{number}th"


def _fixed(value: float, places: int) -> str:
    # Adding 0 takes the sign off a zero.
    return f"{value + 0.0:.{places}f}".replace("-", "−")
