"""Features as files: the document of the contract, the table of peaks, the charts for the screen."""

import json
from dataclasses import dataclass

from fits.assessments.features_document import contract_of
from fits.reports.features.document import Features
from fits.reports.features.tables import peaks_csv
from fits.reports.page import feature_plots
from fits.reports.snapshot import Snapshot


@dataclass(frozen=True)
class FeatureFile:
    """A text and its kind."""

    kind: str
    text: str


def feature_file(
    snapshot: Snapshot, name: str, *, level: str | None = None, curve: str | None = None
) -> FeatureFile | None:
    """The file of this name; None for an unknown name, or where there are no features."""
    features = Features.of(snapshot)
    if features is None:
        return None
    if name == "features.json":
        return FeatureFile("application/json", json.dumps(contract_of(features.document), indent=1))
    if name == "peaks.csv":
        return FeatureFile("text/csv", peaks_csv(features))
    if name == "plots.json":
        return FeatureFile("application/json", json.dumps(feature_plots(snapshot, level=level, curve=curve)))
    return None
