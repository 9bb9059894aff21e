"""The reports from before there were parts lose nothing."""

from collections.abc import Iterator
from typing import Any

import pytest
from django.db import connection
from django.db.migrations.executor import MigrationExecutor
from django.test import Client

from core.people.models import User
from fits.assessments.models import Assessment
from fits.reports.models import Report
from fits.reports.services import create_link
from fits.reports.snapshot import Snapshot

BEFORE, AFTER = [("reports", "0001_initial")], [("reports", "0005_names_when_frozen")]


def migrated(to: list[tuple[str, str]]) -> Any:
    executor = MigrationExecutor(connection)
    executor.migrate(to)
    return MigrationExecutor(connection).loader.project_state(to).apps


@pytest.fixture
def back() -> Iterator[None]:
    yield
    executor = MigrationExecutor(connection)
    executor.migrate(executor.loader.graph.leaf_nodes())


@pytest.mark.django_db(transaction=True)
@pytest.mark.usefixtures("back")
def test_a_report_from_before_becomes_a_frozen_one_of_one_part_and_reads_as_it_did(
    lead: User, done: Assessment, computed: Snapshot, client: Client
) -> None:
    old = migrated(BEFORE).get_model("reports", "Report")
    made = old.objects.create(
        collaboration_id=done.release.measurement.collaboration_id,
        assessment_id=done.pk,
        title="From before",
        words="# Not a heading <b>\n*nor this*",
        snapshot=computed.stored(),
        author_id=lead.pk,
    )
    migrated(AFTER)
    report = Report.objects.get(pk=made.pk)
    part = report.parts.get()
    assert report.is_frozen
    assert (report.created_at, report.frozen_at) == (made.created_at, made.created_at)
    assert report.words == made.words
    assert (report.author_name, report.collaboration_name) == (str(lead), str(report.collaboration))
    assert report.words_html == "<p># Not a heading &lt;b&gt;<br>*nor this*</p>"
    assert part.snapshot == made.snapshot
    assert part.assessment == done
    link = create_link(user=lead, report=report, label="", expires_at=None)
    page = client.get(f"/r/{link.secret}/").content.decode()
    assert "# Not a heading &lt;b&gt;<br>*nor this*" in page
    assert "Two joined basins" in page
    again = migrated(BEFORE).get_model("reports", "Report").objects.get()
    assert (again.snapshot, again.assessment_id, again.words) == (made.snapshot, done.pk, made.words)
