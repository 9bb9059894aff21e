"""Every word and every note is explained under an address of its own."""

import re

import pytest
from django.test import Client
from django.urls import reverse

from fits.assessments.notes import NoteCode
from fits.reports.addresses import RouteAddresses
from fits.reports.page import result_page
from fits.reports.snapshot import Snapshot
from fits.reports.standalone import render_standalone
from tests.reports.test_standalone import page_of

WORDS = {
    "distance",
    "resolution",
    "shrinkage",
    "ball",
    "radius",
    "radius-published",
    "radius-calibrated",
    "radius-cautious",
    "entry-level",
    "p-value",
    "scale-set",
    "leftover",
    "band",
    "error-models",
    "calibration",
    "bins",
    "windows",
}


def anchors(page: str) -> list[str]:
    return re.findall(r'<article id="([^"]+)"', page)


@pytest.mark.django_db
def test_every_word_and_every_note_has_one_anchor_and_every_anchor_is_one_of_them(client: Client) -> None:
    found = anchors(client.get(reverse("reports:explained")).content.decode())
    assert sorted(found) == sorted(WORDS | set(NoteCode))


@pytest.mark.django_db
def test_it_is_read_without_signing_in(client: Client) -> None:
    assert client.get(reverse("reports:explained")).status_code == 200


def test_links_within_the_page_lead_to_what_is_there(client: Client, db: None) -> None:
    page = client.get(reverse("reports:explained")).content.decode()
    targets = set(re.findall(r'href="#([^"]+)"', page))
    assert targets <= set(re.findall(r'id="([^"]+)"', page))


def with_note(snapshot: Snapshot) -> Snapshot:
    notes = [{"code": "curve-finer", "message": "Said."}]
    return Snapshot({**snapshot.result, "notes": notes}, snapshot.detail, snapshot.context)


def test_a_note_leads_to_its_explanation(computed: Snapshot) -> None:
    page = result_page(with_note(computed), RouteAddresses("assessment", 1))
    assert page["explained"] == reverse("reports:explained")


def test_the_page_that_stands_alone_explains_its_notes_itself(computed: Snapshot) -> None:
    snapshot = with_note(computed)
    page = render_standalone(snapshot.result, snapshot.detail, snapshot.context)
    assert 'href="#curve-finer"' in page
    assert set(anchors(page)) == WORDS | set(NoteCode)


def test_no_identifier_stands_twice_on_the_page_that_stands_alone(computed: Snapshot) -> None:
    found = re.findall(
        r'\bid="([^"]+)"', re.sub(r"<script.*?</script>", "", page_of(computed), flags=re.DOTALL)
    )
    assert sorted(found) == sorted(set(found))
