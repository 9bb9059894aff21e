"""What has moved to the parts goes; a report says when it was frozen."""

from django.db import migrations, models


class Migration(migrations.Migration):
    dependencies = [("reports", "0003_move_to_parts")]

    operations = [
        migrations.RemoveField("report", "assessment"),
        migrations.RemoveField("report", "snapshot"),
        migrations.AddConstraint(
            "report",
            models.CheckConstraint(
                condition=models.Q(state="draft", frozen_at=None)
                | models.Q(state="frozen", frozen_at__isnull=False),
                name="frozen_reports_say_when",
            ),
        ),
    ]
