"""Where the size of the errors is estimated, every estimate is shown with its standard error."""

import dataclasses

from fits.reports.addresses import RouteAddresses
from fits.reports.page import result_page
from fits.reports.snapshot import Snapshot


def facts(snapshot: Snapshot) -> dict[str, str]:
    return dict(result_page(snapshot, RouteAddresses("assessment", 1))["trust"])


def test_every_estimate_is_shown_with_its_standard_error(computed: Snapshot) -> None:
    sizes = [
        {"source": "leftover", "sigma": 2.312, "standard_error": 0.1128, "freedom": 210.0},
        {"source": "first differences", "sigma": 2.471, "standard_error": 0.1353, "freedom": 166.7},
    ]
    shown = facts(dataclasses.replace(computed, detail={**computed.detail, "error_sizes": sizes}))
    assert shown["error size from leftover"] == "2.31 ± 0.11"
    assert shown["error size from first differences"] == "2.47 ± 0.14"


def test_results_made_before_there_were_estimates_are_still_shown(computed: Snapshot) -> None:
    detail = {key: value for key, value in computed.detail.items() if key != "error_sizes"}
    assert not [name for name in facts(dataclasses.replace(computed, detail=detail)) if "error size" in name]
