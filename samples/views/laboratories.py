"""The laboratories, as a noun of the register."""

from operator import attrgetter

from django.db.models import Count

from fleet.views.register_noun import Column, Noun, known, words_in
from samples.forms.laboratories import LaboratoryForm
from samples.models import Laboratory

LABORATORY = known(
    Noun(
        key="laboratory",
        many="laboratories",
        one="laboratory",
        model=Laboratory,
        form=LaboratoryForm,
        listed=13,
        intro="Who counted: laboratories, and the plant's own counters.",
        rows=lambda: Laboratory.objects.annotate(sample_count=Count("samples")).order_by("name"),
        search=words_in("name", "notes"),
        columns=(
            Column("Laboratory", attrgetter("name"), sort="name"),
            Column("Codes without counts", attrgetter("codes_only"), sort="codes_only"),
            Column("Volume counted, mL", attrgetter("counted_ml"), numeric=True, sort="counted_ml"),
            Column("Samples", attrgetter("sample_count"), numeric=True, sort="sample_count"),
        ),
        more=(Column("Notes", attrgetter("notes")),),
    )
)
