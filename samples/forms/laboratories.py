"""The form of a laboratory."""

from fleet.forms.base import PlantForm, PlantMeta
from samples.models import Laboratory


class LaboratoryForm(PlantForm):
    class Meta(PlantMeta):
        model = Laboratory
        fields = ["name", "codes_only", "counted_ml", "notes"]
        help_texts = {"codes_only": "Then a result is an interval, and fewer questions can be answered."}
