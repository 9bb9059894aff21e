"""Copies the radius at 95 % of older assessments out of their results, where overviews would have to load these."""

from django.db import migrations

LEVEL = 0.95


def fill(apps, schema_editor):
    assessments = apps.get_model("assessments", "Assessment").objects.filter(status="done", radius=None)
    # The radii alone: results are large.
    rows = assessments.order_by().values_list("pk", "result__radii", "settings__radius")
    for key, radii, kind in list(rows):
        # Older rows were made before there was a choice.
        found = [radius[kind or "calibrated"] for radius in radii or () if radius["level"] == LEVEL]
        if found:
            assessments.filter(pk=key).update(radius=found[0])


class Migration(migrations.Migration):
    dependencies = [("assessments", "0003_desk_radius_separations")]

    operations = [migrations.RunPython(fill, migrations.RunPython.noop, elidable=True)]
