"""What is chosen of a comparison by its query string."""

from collections.abc import Iterable
from dataclasses import dataclass, replace
from urllib.parse import urlencode

from django.http import QueryDict

from fits.engine.settings import DEFAULT_LEVELS
from fits.reports import numbers

LEVELS = tuple(repr(level) for level in DEFAULT_LEVELS)
VERDICTS = {
    "": "any",
    "inside": "jointly inside",
    "outside": "jointly outside",
    "partly": "not judged on every measurement",
}
NAME, JOINT = "name", "joint"


@dataclass(frozen=True)
class Choice:
    """level of the verdicts; text sought in names; verdict to keep; measurements to include (none named: all);
    sort: "name", "joint" or the key of a measurement."""

    level: str = "0.95"
    text: str = ""
    verdict: str = ""
    measurements: frozenset[int] = frozenset()
    sort: str = JOINT
    descending: bool = False

    @property
    def level_number(self) -> float:
        return float(self.level)

    @property
    def level_words(self) -> str:
        """The level as "95 %", which no line breaks."""
        return numbers.level_words(self.level).replace(" ", "\N{NO-BREAK SPACE}")

    @property
    def sort_written(self) -> str:
        """The sorting as it stands in addresses."""
        return f"-{self.sort}" if self.descending else self.sort

    @property
    def query(self) -> str:
        """The query string that chooses this."""
        asked = [("level", self.level), ("sort", self.sort_written)]
        asked += [(name, value) for name, value in (("text", self.text), ("verdict", self.verdict)) if value]
        asked += [("measurement", str(key)) for key in sorted(self.measurements)]
        return urlencode(asked)

    def sorted_by(self, sort: str) -> "Choice":
        """The same in this order; the other way round where it is in this order already."""
        return replace(self, sort=sort, descending=self.sort == sort and not self.descending)


def choice_of(asked: QueryDict, measurements: Iterable[int]) -> Choice:
    """What a query string chooses; what it says amiss is left at what it is without it."""
    known = {str(key) for key in measurements}
    level, verdict = asked.get("level", ""), asked.get("verdict", "")
    sort = asked.get("sort", JOINT)
    by = sort.removeprefix("-")
    is_known = by in {NAME, JOINT} or by in known
    return Choice(
        level=level if level in LEVELS else "0.95",
        text=asked.get("text", "").strip(),
        verdict=verdict if verdict in VERDICTS else "",
        measurements=frozenset(int(key) for key in asked.getlist("measurement") if key in known),
        sort=by if is_known else JOINT,
        descending=is_known and sort.startswith("-"),
    )
