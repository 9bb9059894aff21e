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

    def chart(self, figure: Figure, form: str) -> str:
        """The chart as "svg" or "csv", under the level and curve that it has chosen."""
        path = reverse(f"reports:{self.kind}_chart", args=[self.key, figure.name, form])
        return f"{path}?{urlencode({'level': figure.level, 'curve': figure.curve})}"

    def result_json(self) -> str:
        """The whole result."""
        return reverse(f"reports:{self.kind}_json", args=[self.key])

    def ranking_csv(self) -> str:
        """The ranking table."""
        return reverse(f"reports:{self.kind}_csv", args=[self.key])

    def explained(self) -> str:
        """The page that explains words and notes."""
        return reverse("reports:explained")
