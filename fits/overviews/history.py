"""How the theories of a measurement fared from release to release."""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from fits.overviews.releases import ReleaseSummary
from fits.overviews.standings import Standing, by_theory


@dataclass(frozen=True)
class History:
    """A theory over the releases of a measurement, oldest first; None where it was not judged.

    What changed is told of the releases that count: one that was withdrawn moves nobody.
    """

    theory: int
    theory_name: str
    releases: tuple[ReleaseSummary, ...]
    standings: tuple[Standing | None, ...]

    @property
    def counting(self) -> tuple[tuple[ReleaseSummary, Standing | None], ...]:
        """The releases that are not withdrawn, with the standing on each."""
        both = zip(self.releases, self.standings, strict=True)
        return tuple((release, standing) for release, standing in both if not release.is_withdrawn)

    @property
    def judged(self) -> tuple[Standing, ...]:
        """The standings on the releases that count and on which it was judged."""
        return tuple(standing for _, standing in self.counting if standing is not None)

    @property
    def has_moved(self) -> bool:
        """Whether it crossed the edge of the 95 % set between releases."""
        return len({standing.is_inside for standing in self.judged}) > 1

    @property
    def now(self) -> Standing | None:
        """The standing on the newest release that counts."""
        return self.counting[-1][1] if self.counting else None

    @property
    def has_left(self) -> bool:
        """Whether it was in the 95 % set and is not any more."""
        return self.has_moved and not self.judged[-1].is_inside

    @property
    def left_at(self) -> str:
        """The release at which it left the 95 % set, to be outside since; "–" where it did not."""
        if not self.judged or self.judged[-1].is_inside:
            return "–"
        outside_since = self.judged[-1]
        for standing in reversed(self.judged):
            if standing.is_inside:
                return f"release {outside_since.release_number}{_left_open(standing, outside_since)}"
            outside_since = standing
        first = outside_since.release_number
        return f"never in it{_left_open(*self.judged)}; first judged at release {first}"

    @property
    def changes(self) -> tuple[str, ...]:
        """What happened to it, oldest first, each with its release; what stayed, where nothing did."""
        if not self.judged:
            return ("not judged",)
        found = [change for change in self._steps() if change]
        return (self._stayed(), *found) if not self.has_moved else tuple(found)

    def _stayed(self) -> str:
        if len(self.judged) == 1:
            return _first(self.judged[0])
        word = "inside" if self.judged[-1].is_inside else "outside"
        which = "" if len(self.judged) == len(self.counting) else " that judged it"
        return f"{word} at every release{which}{_left_open(*self.judged)}"

    def _steps(self) -> Iterable[str]:
        known: Standing | None = None
        for release, standing in self.counting:
            if standing is None:
                yield f"not judged at release {release.number}"
                continue
            if known is None:
                yield _first(standing) if self.has_moved else ""
            else:
                yield _step(known, standing)
            known = standing


def _first(standing: Standing) -> str:
    word = "inside" if standing.is_inside else "outside"
    return f"{word} at release {standing.release_number}{_left_open(standing)}"


def _left_open(*standings: Standing) -> str:
    """What is said after a statement that rests on all of these, where a p-value is too near to what decides."""
    draws = {standing.draws for standing in standings if not standing.is_settled}
    return f", which {max(draws)} draws leave open" if draws else ""


def _step(known: Standing, standing: Standing) -> str:
    """What changed between two releases; empty where nothing did."""
    words, doubt = [], ""
    if known.is_inside != standing.is_inside:
        words.append("came inside" if standing.is_inside else "moved outside")
        doubt = _left_open(known, standing)
    if known.version != standing.version:
        newer = f"version {standing.version} of its curve in place of version {known.version}"
        words.append(f"with {newer}" if words else newer)
    return f"{' '.join(words)} at release {standing.release_number}{doubt}" if words else ""


def histories(
    releases: Iterable[ReleaseSummary], standings: Mapping[int, Sequence[Standing]]
) -> list[History]:
    """Each judged theory over the releases; ordered as on the newest release that judged it and counts."""
    ordered = tuple(sorted(releases, key=lambda release: release.number))
    columns = [by_theory(standings.get(release.assessment or 0, [])) for release in ordered]
    names = {key: standing.theory_name for column in columns for key, standing in column.items()}

    def place(theory: int) -> tuple[bool, int, int]:
        judged = [
            (release.is_withdrawn, age, column[theory].rank)
            for age, (release, column) in enumerate(zip(reversed(ordered), reversed(columns), strict=True))
            if theory in column
        ]
        return min(judged)

    return [
        History(theory, names[theory], ordered, tuple(column.get(theory) for column in columns))
        for theory in sorted(names, key=place)
    ]
