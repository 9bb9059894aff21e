"""Where the files of a result are fetched from, by the page that they belong to."""

from dataclasses import dataclass
from urllib.parse import urlencode

from django.urls import reverse

from fits.reports.figures.figure import Figure


@dataclass(frozen=True)
class RouteAddresses:
    """Addresses of the routes "reports:<kind>_chart", "_json" and "_csv"."""

    kind: str
    key: int | str
    search: int | None = None  # the search for features that is shown, where there may be several
    part: int | None = None  # the page of a report, where it has several

    def chart(self, figure: Figure, form: str) -> str:
        """The chart as "svg" or "csv", under the level and curve that it has chosen."""
        path = reverse(f"reports:{self.kind}_chart", args=[self.key, figure.name, form])
        asked = {"level": figure.level, "curve": figure.curve} | self._which()
        return f"{path}?{urlencode(asked)}"

    def result_json(self) -> str:
        """The whole result."""
        return self._with_which(reverse(f"reports:{self.kind}_json", args=[self.key]))

    def ranking_csv(self) -> str:
        """The ranking table."""
        return self._with_which(reverse(f"reports:{self.kind}_csv", args=[self.key]))

    def explained(self) -> str:
        """The page that explains words and notes."""
        return reverse("reports:explained")

    def features(self, name: str) -> str:
        """A file of the features."""
        return self._with_which(reverse(f"reports:{self.kind}_features", args=[self.key, name]))

    def _with_which(self, path: str) -> str:
        which = self._which()
        return f"{path}?{urlencode(which)}" if which else path

    def _which(self) -> dict[str, int]:
        """What of several is meant."""
        meant = {"search": self.search, "part": self.part}
        return {name: key for name, key in meant.items() if key}
