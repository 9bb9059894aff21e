"""A frozen report keeps the names of its author and its collaboration; those so far, the names of today."""

from typing import Any

from django.db import migrations, models


def keep_names(apps: Any, schema_editor: Any) -> None:
    """As pages show them: of an author without a name, the address up to its @."""
    reports = apps.get_model("reports", "Report").objects
    frozen = reports.filter(state="frozen").select_related("author", "collaboration")
    for report in frozen.only("author__name", "author__email", "collaboration__name"):
        reports.filter(pk=report.pk).update(
            author_name=report.author.name or report.author.email.partition("@")[0],
            collaboration_name=report.collaboration.name,
        )


class Migration(migrations.Migration):
    dependencies = [("reports", "0004_moved_to_parts")]

    operations = [
        migrations.AddField(
            "report",
            "author_name",
            models.CharField(blank=True, default="", max_length=254),
            preserve_default=False,
        ),
        migrations.AddField(
            "report",
            "collaboration_name",
            models.CharField(blank=True, default="", max_length=120),
            preserve_default=False,
        ),
        migrations.RunPython(keep_names, migrations.RunPython.noop),
    ]
