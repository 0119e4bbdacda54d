"""Every word of a person on a sample stays; the ones said so far are the latest of each sample."""

from typing import Any

import django.db.models.deletion
from django.conf import settings
from django.db import migrations, models

VERDICTS = [("accepted", "accepted"), ("in_doubt", "in doubt"), ("set_aside", "set aside")]


def keep_the_latest_word(apps: Any, schema_editor: Any) -> None:
    sample, judgement = apps.get_model("samples", "Sample"), apps.get_model("samples", "Judgement")
    judged = sample.objects.filter(verdict_at__isnull=False).iterator()
    judgement.objects.bulk_create(
        (
            judgement(
                sample_id=one.pk, verdict=one.verdict, by_id=one.verdict_by_id, at=one.verdict_at, reason=one.verdict_reason
            )
            for one in judged
        ),
        batch_size=500,
    )


class Migration(migrations.Migration):
    dependencies = [
        ("samples", "0003_intake_pending"),
        migrations.swappable_dependency(settings.AUTH_USER_MODEL),
    ]

    operations = [
        migrations.CreateModel(
            name="Judgement",
            fields=[
                ("id", models.BigAutoField(auto_created=True, primary_key=True, serialize=False, verbose_name="ID")),
                ("verdict", models.CharField(choices=VERDICTS, max_length=10)),
                ("at", models.DateTimeField()),
                ("reason", models.CharField(blank=True, max_length=240)),
                (
                    "by",
                    models.ForeignKey(
                        blank=True,
                        null=True,
                        on_delete=django.db.models.deletion.SET_NULL,
                        related_name="+",
                        to=settings.AUTH_USER_MODEL,
                    ),
                ),
                (
                    "sample",
                    models.ForeignKey(
                        on_delete=django.db.models.deletion.CASCADE, related_name="judgements", to="samples.sample"
                    ),
                ),
            ],
            options={"ordering": ["sample", "at", "pk"]},
        ),
        migrations.RunPython(keep_the_latest_word, migrations.RunPython.noop),
    ]
