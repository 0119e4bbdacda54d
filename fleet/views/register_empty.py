"""The way on where a form asks to choose from a list that is empty yet."""

from collections.abc import Iterator
from typing import Any

from django.db.models import Exists, Model
from django.forms import Field, ModelChoiceField, ModelMultipleChoiceField
from django.urls import reverse
from django.utils.html import format_html
from django.utils.http import urlencode
from django.utils.safestring import SafeString

from fleet.forms.base import PlantForm
from fleet.models import Person
from fleet.views.register_noun import NOUNS, Noun


def lead_out_of_empty_lists(form: PlantForm, person: Person, here: str) -> None:
    """Beside every list without a row: add the first one, and come back `here`; or who can add it. One question."""
    nouns = {noun.model: noun for noun in NOUNS.values()}
    lists = [(field, nouns[model]) for field, model in _lists(form) if model in nouns]
    filled = _filled({noun.key: noun.model for _, noun in lists}, person)
    for field, noun in lists:
        if not filled[noun.key]:
            field.help_text = _way_on(noun, person, here)


def _lists(form: PlantForm) -> Iterator[tuple[Field, type[Model]]]:
    """The fields that choose one row of a table, without those beside which a new one can be written."""
    for name, field in form.fields.items():
        is_list = isinstance(field, ModelChoiceField) and not isinstance(field, ModelMultipleChoiceField)
        rows = form.chooser(name).queryset if is_list else None
        if rows is not None and f"new_{name}" not in form.fields:
            yield field, rows.model


def _filled(models: dict[str, type[Model]], person: Person) -> dict[str, Any]:
    questions = {key: Exists(model._default_manager.all()) for key, model in models.items()}
    row: Any = Person.objects.filter(pk=person.pk).values(**questions).get() if questions else {}
    return dict(row)


def _way_on(noun: Noun, person: Person, here: str) -> SafeString:
    if not person.may_act_as(noun.write):
        return format_html("None yet. An {} can add {}.", noun.write.label, noun.a_one)
    address = f"{reverse(noun.name + '-add')}?{urlencode({'next': here})}"
    return format_html('None yet: <a href="{}">add {}</a>.', address, noun.a_one)
