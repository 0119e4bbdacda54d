"""Choosing a lab file, and saying "import" to one that was checked."""

from __future__ import annotations

from typing import Any

from django import forms

from fleet.models import Person
from samples.models import Laboratory, PendingFile

FILE_ATTRS = {"accept": ".csv,.txt,.tsv,text/csv,text/plain,text/tab-separated-values"}
EMPTY = "The file is empty. Check that the export was finished."


class UploadForm(forms.Form):
    """`laboratory` is for rows that name none."""

    file = forms.FileField(label="Lab file", widget=forms.FileInput(attrs=FILE_ATTRS), allow_empty_file=True)
    laboratory = forms.ModelChoiceField(
        Laboratory.objects.all(), required=False, empty_label="as the rows say", label="Laboratory"
    )

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        self.fields["file"].error_messages["required"] = "Choose the file that the laboratory sent."
        self.fields["file"].error_messages["invalid"] = "No file arrived. Choose it again."
        self.fields["file"].error_messages["max_length"] = "The file's name is too long. Give it a shorter one."
        self.fields["laboratory"].error_messages["invalid_choice"] = "That laboratory is not registered."


class ImportForm(forms.Form):
    """Names a file that this person had checked."""

    pending = forms.ModelChoiceField(PendingFile.objects.none())

    def __init__(self, *args: Any, brought_by: Person, **more: Any) -> None:
        super().__init__(*args, **more)
        field: Any = self.fields["pending"]
        field.queryset = PendingFile.objects.filter(brought_by=brought_by).select_related("laboratory")
        said = "The checked file is no longer waiting: it went in, or it lay for more than a day. Choose it again."
        field.error_messages["invalid_choice"] = field.error_messages["required"] = said
