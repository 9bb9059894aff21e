"""The reports so far are frozen ones of one part: all that they say stays as it is."""

from typing import Any

from django.db import migrations
from django.db.models import F
from django.utils.html import linebreaks


def move(apps: Any, schema_editor: Any) -> None:
    """One part each. Their words were plain text, and are shown as they were."""
    reports, parts = apps.get_model("reports", "Report"), apps.get_model("reports", "ReportPart")
    for report in reports.objects.filter(snapshot__isnull=False).iterator(chunk_size=20):
        parts.objects.create(
            report=report, order=1, assessment_id=report.assessment_id, snapshot=report.snapshot
        )
        html = str(linebreaks(report.words, autoescape=True)) if report.words else ""
        reports.objects.filter(pk=report.pk).update(
            state="frozen", frozen_at=F("created_at"), words_html=html, snapshot=None
        )


def move_back(apps: Any, schema_editor: Any) -> None:
    """A report of several parts has no place in the form before: it is left with its first."""
    reports, parts = apps.get_model("reports", "Report"), apps.get_model("reports", "ReportPart")
    reports.objects.filter(state="draft").delete()
    for part in (
        parts.objects.filter(snapshot__isnull=False).order_by("report", "-order").iterator(chunk_size=20)
    ):
        reports.objects.filter(pk=part.report_id).update(
            snapshot=part.snapshot, assessment_id=part.assessment_id
        )
    # One of words alone.
    reports.objects.filter(snapshot__isnull=True).update(snapshot={})


class Migration(migrations.Migration):
    dependencies = [("reports", "0002_parts_passphrases_prints")]

    operations = [migrations.RunPython(move, move_back)]
