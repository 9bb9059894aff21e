"""The page that is one file."""

import re

from fits.reports.snapshot import Snapshot
from fits.reports.standalone import render_standalone


def page_of(snapshot: Snapshot) -> str:
    return render_standalone(snapshot.result, snapshot.detail, snapshot.context)


def test_it_is_made_without_a_database(computed: Snapshot) -> None:
    assert "Of 3 theories" in page_of(computed)


def test_it_leads_nowhere_but_to_itself(computed: Snapshot) -> None:
    addresses = re.findall(
        r"""<(?:img|script|link|a|iframe|form)\b[^>]*?(?:src|href|action)=["']([^"']*)""", page_of(computed)
    )
    assert addresses
    assert all(address.startswith(("data:", "#")) for address in addresses)


def test_it_can_be_made_of_numbers_alone(computed: Snapshot) -> None:
    bare = {"collaboration": None, "measurement": None, "release": None, "curves": None, "settings": None}
    assert "these data" in page_of(Snapshot(computed.result, computed.detail, bare))


def test_a_hostile_name_stays_text(computed: Snapshot) -> None:
    name = "</script><script>alert(1)</script>"
    result = {**computed.result, "curves": [computed.curves[0] | {"name": name}]}
    detail = {
        **computed.detail,
        "curves": [computed.drawing(computed.names[0]) | {"name": name}],
        "neighbours": [],
    }
    assert "<script>alert(1)" not in page_of(Snapshot(result, detail, computed.context))


def test_features_are_inside_it_with_their_charts_and_files(featured: Snapshot) -> None:
    page = render_standalone(featured.result, featured.detail, featured.context, featured.features)
    assert "the data demand at least 3 peaks" in page
    assert page.count("data:image/svg+xml") >= 15
    assert 'download="features.json"' in page
    assert "data-plots" not in page
    addresses = re.findall(r"""<(?:img|a|form)\b[^>]*?(?:src|href|action)=["']([^"']*)""", page)
    assert all(address.startswith(("data:", "#")) for address in addresses)
