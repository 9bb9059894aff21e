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
                return f"release {outside_since.release_number}"
            outside_since = standing
        return f"never in it, first judged at release {outside_since.release_number}"

    @property
    def changes(self) -> tuple[str, ...]:
        """What happened to it, oldest first, each with its release; what stayed, where nothing did."""
        if not self.judged:
            return ("not judged",)
        found = [change for change in self._steps() if change]
        return (self._stayed(), *found) if not self.has_moved else tuple(found)

    def _stayed(self) -> str:
        word = "inside" if self.judged[-1].is_inside else "outside"
        if len(self.judged) == 1:
            return f"{word} at release {self.judged[0].release_number}"
        every = len(self.judged) == len(self.counting)
        return f"{word} at every release" if every else f"{word} at every release that judged it"

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
    return f"{'inside' if standing.is_inside else 'outside'} at release {standing.release_number}"


def _step(known: Standing, standing: Standing) -> str:
    """What changed between two releases; empty where nothing did."""
    words = []
    if known.is_inside != standing.is_inside:
        words.append("came inside" if standing.is_inside else "moved outside")
    if known.version != standing.version:
        newer = f"version {standing.version} of its curve in place of version {known.version}"
        words.append(f"with {newer}" if words else newer)
    return f"{' '.join(words)} at release {standing.release_number}" if words else ""


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
