"""Reports of several parts, drafts of them, passphrases of links, prints. The old columns stay until they are moved."""

import django.db.models.deletion
import django.utils.timezone
from django.conf import settings
from django.db import migrations, models


class Migration(migrations.Migration):
    dependencies = [
        ("assessments", "0004_fill_radius"),
        ("reports", "0001_initial"),
        migrations.swappable_dependency(settings.AUTH_USER_MODEL),
    ]

    operations = [
        migrations.AddField(
            "report",
            "state",
            models.CharField(
                choices=[("draft", "draft"), ("frozen", "frozen")], default="draft", max_length=6
            ),
        ),
        migrations.AddField(
            "report", "words_html", models.TextField(blank=True, default=""), preserve_default=False
        ),
        migrations.AddField("report", "revision", models.PositiveIntegerField(default=0)),
        migrations.AddField(
            "report",
            "previous",
            models.ForeignKey(
                blank=True,
                null=True,
                on_delete=django.db.models.deletion.PROTECT,
                related_name="later",
                to="reports.report",
            ),
        ),
        migrations.AddField("report", "frozen_at", models.DateTimeField(blank=True, null=True)),
        # Not asked for any more; the next step moves it to a part.
        migrations.AlterField("report", "snapshot", models.JSONField(null=True)),
        migrations.CreateModel(
            name="ReportPart",
            fields=[
                (
                    "id",
                    models.BigAutoField(
                        auto_created=True, primary_key=True, serialize=False, verbose_name="ID"
                    ),
                ),
                ("order", models.PositiveIntegerField()),
                ("heading", models.CharField(blank=True, max_length=200)),
                ("words", models.TextField(blank=True)),
                ("words_html", models.TextField(blank=True)),
                ("shown", models.JSONField(blank=True, null=True)),
                ("revision", models.PositiveIntegerField(default=0)),
                ("snapshot", models.JSONField(blank=True, null=True)),
                ("finding", models.TextField(blank=True)),
                (
                    "assessment",
                    models.ForeignKey(
                        blank=True,
                        null=True,
                        on_delete=django.db.models.deletion.SET_NULL,
                        related_name="report_parts",
                        to="assessments.assessment",
                    ),
                ),
                (
                    "report",
                    models.ForeignKey(
                        on_delete=django.db.models.deletion.CASCADE, related_name="parts", to="reports.report"
                    ),
                ),
                (
                    "search",
                    models.ForeignKey(
                        blank=True,
                        null=True,
                        on_delete=django.db.models.deletion.SET_NULL,
                        related_name="+",
                        to="assessments.featuresearch",
                    ),
                ),
            ],
            options={"ordering": ("report", "order", "pk")},
        ),
        migrations.AddField(
            "sharelink",
            "passphrase",
            models.CharField(blank=True, default="", max_length=128),
            preserve_default=False,
        ),
        migrations.AddField("sharelink", "opened", models.PositiveIntegerField(default=0)),
        migrations.AddField("sharelink", "last_opened_at", models.DateTimeField(blank=True, null=True)),
        migrations.CreateModel(
            name="PassphraseTry",
            fields=[
                (
                    "id",
                    models.BigAutoField(
                        auto_created=True, primary_key=True, serialize=False, verbose_name="ID"
                    ),
                ),
                ("at", models.DateTimeField(default=django.utils.timezone.now)),
                (
                    "link",
                    models.ForeignKey(
                        on_delete=django.db.models.deletion.CASCADE,
                        related_name="tries",
                        to="reports.sharelink",
                    ),
                ),
            ],
        ),
        migrations.CreateModel(
            name="Printing",
            fields=[
                (
                    "id",
                    models.BigAutoField(
                        auto_created=True, primary_key=True, serialize=False, verbose_name="ID"
                    ),
                ),
                ("created_at", models.DateTimeField(auto_now_add=True)),
                (
                    "status",
                    models.CharField(
                        choices=[
                            ("queued", "queued"),
                            ("running", "running"),
                            ("done", "done"),
                            ("failed", "failed"),
                            ("cancelled", "cancelled"),
                        ],
                        default="queued",
                        max_length=10,
                    ),
                ),
                ("attempt", models.PositiveSmallIntegerField(default=0)),
                ("heartbeat_at", models.DateTimeField(blank=True, null=True)),
                ("cancel_requested", models.BooleanField(default=False)),
                ("started_at", models.DateTimeField(blank=True, null=True)),
                ("ended_at", models.DateTimeField(blank=True, null=True)),
                ("failure_code", models.CharField(blank=True, max_length=60)),
                ("failure", models.TextField(blank=True)),
                ("paper", models.CharField(choices=[("a4", "A4"), ("letter", "US letter")], max_length=6)),
                ("pdf", models.BinaryField(blank=True, null=True)),
                (
                    "report",
                    models.ForeignKey(
                        on_delete=django.db.models.deletion.CASCADE,
                        related_name="printings",
                        to="reports.report",
                    ),
                ),
            ],
            options={"ordering": ("report", "paper")},
        ),
        migrations.AddConstraint(
            "printing", models.UniqueConstraint(fields=("report", "paper"), name="printed_once_for_a_paper")
        ),
    ]
