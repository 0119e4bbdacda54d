"""What every form of the register has in common: figures with a comma, site time, plain sentences for broken rules."""

from __future__ import annotations

from collections.abc import Iterator
from datetime import UTC, datetime
from typing import TYPE_CHECKING, Any, ClassVar, cast

from django import forms
from django.core.exceptions import ValidationError
from django.db import models
from django.forms.models import construct_instance
from django.utils import timezone

from fleet.forms.words import speak_plainly
from fleet.models import Site
from fleet.refusals import SENTENCES
from fleet.site_time import moment_at, written_at

if TYPE_CHECKING:
    ModelForm = forms.ModelForm[Any]
else:
    ModelForm = forms.ModelForm


class FigureField(forms.FloatField):
    """A number, with a point or a decimal comma. It is a text field, so that what was typed is never thrown away."""

    widget = forms.TextInput

    def __init__(self, **more: Any) -> None:
        more["widget"] = forms.TextInput(attrs={"inputmode": "decimal", "class": "figure", "autocomplete": "off"})
        super().__init__(**more)
        self.error_messages["invalid"] = "“%(value)s” is not a number. Write it like 0.25 or 0,25."

    def to_python(self, value: Any) -> float | None:  # type: ignore[override]
        text = str(value).strip().replace("\N{MINUS SIGN}", "-").replace(",", ".") if value is not None else ""
        try:
            return super().to_python(text)
        except ValidationError as error:
            raise ValidationError(self.error_messages["invalid"], code="invalid", params={"value": value}) from error


class PercentField(FigureField):
    """A share of 1 that is written and shown in per cent: 0.2 is 20."""

    def to_python(self, value: Any) -> float | None:  # type: ignore[override]
        percent = super().to_python(value)
        return None if percent is None else percent / 100

    def prepare_value(self, value: Any) -> Any:
        return f"{100 * value:.10g}" if isinstance(value, int | float) else value


class SiteTimeField(forms.DateTimeField):
    """Date and time as the site's clock shows them; the form turns it into a moment once it knows the site."""

    def __init__(self, **more: Any) -> None:
        attrs = {"type": "datetime-local", "class": "moment when"}
        more["widget"] = forms.DateTimeInput(attrs=attrs, format="%Y-%m-%dT%H:%M")
        super().__init__(**more)
        self.error_messages["invalid"] = "Give a day and a time, for example 2026-03-01 14:30."

    def to_python(self, value: Any) -> datetime | None:
        with timezone.override(UTC):
            moment = super().to_python(value)
        return moment and moment.replace(tzinfo=None)


def plant_field(column: models.Field[Any, Any], **more: Any) -> forms.Field | None:
    """The form field of a model's column, as the register shows it."""
    if isinstance(column, models.FloatField):
        more["form_class"] = FigureField
    elif isinstance(column, models.DateTimeField):
        more["form_class"] = SiteTimeField
    elif isinstance(column, models.DateField):
        more["widget"] = forms.DateInput(attrs={"type": "date", "class": "moment"}, format="%Y-%m-%d")
    elif isinstance(column, models.IntegerField):
        more["widget"] = forms.NumberInput(attrs={"class": "short"})
    elif isinstance(column, models.TextField):
        more["widget"] = forms.Textarea(attrs={"rows": 3})
    return column.formfield(**more)


def _say_nothing_chosen(field: forms.Field) -> None:
    """Words for the empty choice, instead of a row of dashes."""
    words = "choose" if field.required else "none"
    if isinstance(field, forms.ModelChoiceField):
        if field.empty_label is not None:
            field.empty_label = words
    elif isinstance(field, forms.ChoiceField):
        offered = cast("list[tuple[Any, Any]]", field.choices)
        field.choices = [(value, words if value == "" else label) for value, label in offered]


class PlantMeta:
    """Base of every form's Meta."""

    formfield_callback = staticmethod(plant_field)


class PlantForm(ModelForm):
    """A form of the register. `now` is when the page was asked for; `groups` are its parts with their headings.

    `narrowed_by` names what an address may give (?reservoir=5) to offer fewer choices, beside the fields themselves.
    `left_to_saving` names the rules that hold only after saving has made room: the subject checks them.
    """

    groups: ClassVar[list[tuple[str, list[str]]]] = []
    site_times: ClassVar[tuple[str, ...]] = ()
    caution: ClassVar[str] = ""
    narrowed_by: ClassVar[tuple[str, ...]] = ()
    left_to_saving: ClassVar[tuple[str, ...]] = ()

    def __init__(self, *args: Any, now: datetime, **more: Any) -> None:
        super().__init__(*args, **more)
        self.now = now
        speak_plainly(self)
        for field in self.fields.values():
            _say_nothing_chosen(field)
        for name in self.site_times:
            moment = self.initial.get(name)
            site = self.known_site()
            if moment is not None and site is not None:
                self.initial[name] = written_at(moment, site.zone)

    def known_site(self) -> Site | None:
        """The site whose clock the form's times are read by; None while it cannot be told."""
        return None

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or self.cleaned_data
        site = self.known_site()
        for name in self.site_times:
            if isinstance(cleaned.get(name), datetime):
                cleaned[name] = self._moment(name, cleaned[name], site)
        return cleaned

    def _moment(self, name: str, written: datetime, site: Site | None) -> datetime | None:
        if site is None:
            return written.replace(tzinfo=UTC)
        try:
            moment = moment_at(written, site.zone)
        except ValueError as error:
            self.add_error(name, ValidationError(str(error), code="clock_gap"))
            return None
        if moment > self.now:
            said = f"That is still to come: it is {written_at(self.now, site.zone):%-d %b %Y %H:%M} at {site.name}."
            self.add_error(name, ValidationError(said, code="future"))
            return None
        return moment

    def _post_clean(self) -> None:
        """As a model form does, but the rules of the table are said in the register's own words."""
        exclude = self._get_validation_exclusions()  # type: ignore[attr-defined]
        self.instance = construct_instance(self, self.instance, self._meta.fields, self._meta.exclude)
        try:
            self.instance.full_clean(exclude=exclude, validate_unique=False, validate_constraints=False)
        except ValidationError as error:
            self._update_errors(error)  # type: ignore[attr-defined]
        self.validate_unique()
        self._say_broken_rules()

    def _say_broken_rules(self) -> None:
        """Every broken rule of the table, each sentence once: two rules may say the same of one name."""
        exclude = self._get_validation_exclusions()  # type: ignore[attr-defined]
        said = set()
        for constraint in self._meta.model._meta.constraints:
            if constraint.name in self.left_to_saving:
                continue
            try:
                constraint.validate(self._meta.model, self.instance, exclude=exclude)
            except ValidationError as error:
                field, sentence = SENTENCES.get(constraint.name, ("", " ".join(error.messages)))
                if sentence not in said:
                    self.say(sentence, field, constraint.name)
                said.add(sentence)

    def say(self, sentence: str, field: str, code: str) -> None:
        """Show a sentence at a field, or above the form when the form has no such field."""
        self.add_error(field if field in self.fields else None, ValidationError(sentence, code=code))

    def chooser(self, name: str) -> forms.ModelChoiceField[Any]:
        """The field by which a row of another table is chosen."""
        return cast("forms.ModelChoiceField[Any]", self.fields[name])

    def grouped(self) -> Iterator[tuple[str, list[forms.BoundField]]]:
        """The visible fields by their headings; one part without a heading when there are no groups."""
        if not self.groups:
            yield "", self.visible_fields()
            return
        for title, names in self.groups:
            if fields := [self[name] for name in names if name in self.fields]:
                yield title, fields


def summary(form: forms.BaseForm) -> list[tuple[str, str, str]]:
    """Every error as (id of its field or empty, label, sentence), in the order of the form: the list at its top."""
    lines = [("", "", str(sentence)) for sentence in form.non_field_errors()]
    for field in form:
        lines += [(field.id_for_label, str(field.label), str(sentence)) for sentence in field.errors]
    return lines
