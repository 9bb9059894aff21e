"""A search for features as it is stored, and the questions asked of it again and again."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from enum import StrEnum
from typing import Any

from fits.assessments.document import level_key
from fits.reports.snapshot import Document, Snapshot


class Kind(StrEnum):
    """What is looked for; a dip is a peak of the curve upside down."""

    PEAK = "peak"
    DIP = "dip"


class Standing(StrEnum):
    """How a statement stands at a level: its price is above the radius, within it, or not known well enough."""

    RULED_OUT = "ruled out"
    POSSIBLE = "possible"
    UNDECIDED = "undecided"


@dataclass(frozen=True)
class Step:
    """The price of "at most so many peaks": no less than `lower`; a curve was found at `upper`, None: none was."""

    at_most: int
    lower: float
    upper: float | None
    demanded_level: float
    witness: Mapping[str, Sequence[float]] | None

    def standing(self, radius: float) -> Standing:
        """How it stands within a ball of this radius."""
        if self.lower > radius:
            return Standing.RULED_OUT
        if self.upper is not None and self.upper <= radius:
            return Standing.POSSIBLE
        return Standing.UNDECIDED


@dataclass(frozen=True)
class Interval:
    """From low to high."""

    low: float
    high: float

    def holds(self, x: float) -> bool:
        """Whether x lies in it."""
        return self.low <= x <= self.high


@dataclass(frozen=True, eq=False)
class Feature:
    """One peak or dip in its window, by the number it goes by, from 1."""

    kind: Kind
    number: int
    found: Document

    @property
    def name(self) -> str:
        """ "peak 2"."""
        return f"{self.kind} {self.number}"

    @property
    def window(self) -> Interval:
        """Where it was sought."""
        return Interval(*map(float, self.found["window"]))

    @property
    def profile(self) -> tuple[tuple[float, float | None], ...]:
        """x and the price of a peak there, None where there is no number."""
        profile = self.found["profile"]
        return tuple(zip(profile["x"], profile["price"], strict=True))

    def location(self, level: str) -> tuple[Interval, ...]:
        """Where it can be."""
        return tuple(Interval(float(low), float(high)) for low, high in self.found["location"][level])

    def height(self, level: str) -> Interval | None:
        """How high (how low, for a dip) it can be; None where a programme could not be solved."""
        low, high = self.found["height"][level]
        return None if low is None or high is None else Interval(float(low), float(high))

    @property
    def map(self) -> Document | None:
        """Prices over location and height together."""
        return self.found.get("map")

    @property
    def samples(self) -> Document | None:
        """How far curves drawn from the ball reach."""
        return self.found.get("samples")

    def absence(self, radius: float) -> Standing:
        """How a curve without it stands within a ball of this radius."""
        price, entry_level = self.found["no_peak"]["price"], self.found["no_peak"]["entry_level"]
        if entry_level is None:
            return Standing.UNDECIDED
        # Without a price no curve at all is without it.
        return Standing.RULED_OUT if price is None or price > radius else Standing.POSSIBLE

    @property
    def demanded_up_to(self) -> float | None:
        """The level up to which every curve of the ball has it; None where the programme could not be solved."""
        level = self.found["no_peak"]["entry_level"]
        return None if level is None else float(level)


@dataclass(frozen=True, eq=False)
class Features:
    """Everything that one search found, as far as it has got."""

    document: Document

    @classmethod
    def of(cls, snapshot: Snapshot) -> "Features | None":
        """The features of a result; None where none were asked for."""
        return None if snapshot.features is None else cls(snapshot.features)

    @property
    def levels(self) -> tuple[str, ...]:
        """Level keys, increasing."""
        return tuple(level_key(radius["level"]) for radius in self.document["radii"])

    def radius(self, level: str) -> float:
        """The calibrated radius of a level, at which every interval is cut."""
        radii = self.document["radii"]
        return next(float(r["calibrated"]) for r in radii if level_key(r["level"]) == level)

    @property
    def largest_radius(self) -> float:
        """That of the highest level."""
        return max(self.radius(level) for level in self.levels)

    def found(self, kind: Kind) -> tuple[Feature, ...]:
        """The peaks or dips in their order."""
        found = self.document["peaks" if kind is Kind.PEAK else "dips"]
        return tuple(Feature(kind, number, part) for number, part in enumerate(found, start=1))

    def steps(self, kind: Kind) -> tuple[Step, ...]:
        """The prices of at most 0, 1, 2, … of them; empty where they were not computed."""
        stored = self.document["count" if kind is Kind.PEAK else "dip_count"] or []
        return tuple(
            Step(
                at_most=int(step["at_most"]),
                lower=float(step["price_lower"]),
                upper=None if step["price_upper"] is None else float(step["price_upper"]),
                demanded_level=float(step["demanded_level"]),
                witness=step.get("witness"),
            )
            for step in stored
        )

    @property
    def spacing(self) -> Document | None:
        """Even spacing of the peaks."""
        return self.document.get("spacing")

    @property
    def harmonic(self) -> Document | None:
        """Even spacing that starts at 0: whole multiples of the spacing."""
        return self.document.get("harmonic")

    @property
    def is_complete(self) -> bool:
        """Whether every part of the search has ended."""
        return bool(self.document.get("complete", True))

    def part(self, name: str) -> Any:
        """Any other part of the document, None where it is not there."""
        return self.document.get(name)
