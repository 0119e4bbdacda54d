from django.db import migrations

from fleet import catalogue


def add_catalogue(apps, schema_editor):
    catalogue.load(apps.get_model("fleet", "Measurand"))


class Migration(migrations.Migration):
    dependencies = [("fleet", "0001_initial")]

    operations = [migrations.RunPython(add_catalogue, migrations.RunPython.noop)]
