"""The documents that a page of results is made from, and the questions asked of them again and again."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from fits.assessments.document import level_key

Document = Mapping[str, Any]
DEFAULT_LEVEL = 0.95


@dataclass(frozen=True, eq=False)
class Snapshot:
    """result: what `rank --json` writes; detail: what the charts need beside it; context: where it came from;
    features: what was found of peaks and dips, None where none were asked for."""

    result: Document
    detail: Document
    context: Document
    features: Document | None = None

    @classmethod
    def of(cls, stored: Mapping[str, Any]) -> "Snapshot":
        """From the mapping that a report keeps."""
        return cls(stored["result"], stored["detail"], stored["context"], stored.get("features"))

    def stored(self) -> dict[str, Any]:
        """The mapping that a report keeps."""
        return {
            "result": self.result,
            "detail": self.detail,
            "context": self.context,
            "features": self.features,
        }

    @property
    def hidden(self) -> int:
        """How many curves were judged and are not shown."""
        return int(self.context.get("hidden") or 0)

    @property
    def levels(self) -> tuple[str, ...]:
        """Level keys, increasing: "0.67", "0.9", …"""
        return tuple(level_key(radius["level"]) for radius in self.result["radii"])

    def level_or_default(self, asked: str | None = None) -> str:
        """The level that was asked for if there is one, else 0.95 or the nearest to it."""
        if asked in self.levels:
            return str(asked)
        return min(self.levels, key=lambda level: (abs(float(level) - DEFAULT_LEVEL), -float(level)))

    @property
    def radius_kind(self) -> str:
        """The radius that was chosen to be drawn: "calibrated", as in all older results, or "cautious"."""
        return (self.context.get("settings") or {}).get("radius") or "calibrated"

    def radius(self, level: str) -> float:
        """The radius of a level, of the kind that was chosen."""
        return next(
            float(r[self.radius_kind]) for r in self.result["radii"] if level_key(r["level"]) == level
        )

    @property
    def curves(self) -> tuple[dict[str, Any], ...]:
        """The verdicts, in rank order."""
        return tuple(dict(curve) for curve in self.result["curves"])

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the curves, in rank order."""
        return tuple(curve["name"] for curve in self.curves)

    def name_or_first(self, asked: str | None = None) -> str:
        """The curve that was asked for if there is one, else the first in rank."""
        return asked if asked is not None and asked in self.names else self.names[0]

    def drawing(self, name: str) -> dict[str, Any]:
        """What the charts need of a curve."""
        return next(dict(curve) for curve in self.detail["curves"] if curve["name"] == name)

    def origin(self, name: str) -> dict[str, Any]:
        """Where a curve came from; empty where that is not known."""
        known = self.context.get("curves") or []
        return next((dict(curve) for curve in known if curve["name"] == name), {})

    @property
    def measurement(self) -> Document:
        """Names and units; empty where they are not known."""
        return self.context.get("measurement") or {}

    @property
    def x_label(self) -> str:
        """Name and unit of x."""
        return self.measurement.get("x_label") or "x"

    @property
    def y_label(self) -> str:
        """Name and unit of y, on the scale on which the data are judged."""
        label = self.measurement.get("y_label") or "y"
        # Counts are judged, and drawn, after Anscombe's transformation.
        return f"2√(v + 3/8), v: {label}" if self.result["release"]["errors"] == "counts" else label

    @property
    def x_unit(self) -> str:
        """Unit of x, empty where it has none."""
        return self.measurement.get("x_unit") or ""

    @property
    def y_unit(self) -> str:
        """Unit of y, empty where it has none or where counts are judged on another scale."""
        is_counted = self.result["release"]["errors"] == "counts"
        return "" if is_counted else self.measurement.get("y_unit") or ""

    @property
    def on_log_axis(self) -> bool:
        """Whether the resolution is even on ln x."""
        return self.measurement.get("axis") == "log"

    def inside(self, curve: Document) -> dict[str, bool]:
        """Level → whether the exact ball set holds the curve."""
        return dict(curve["inside"]["exact"])
