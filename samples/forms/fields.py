"""Form fields that read numbers, days and times as people and laboratories write them."""

from __future__ import annotations

from datetime import date, time
from decimal import Decimal
from typing import Any

from django import forms
from django.core.exceptions import ValidationError

from samples.intake.dates import read_date, read_time
from samples.intake.numbers import ReadNumber, read_number

LONGEST_NUMBER = 40
NUMBER_ATTRS = {"inputmode": "decimal", "class": "figure", "autocomplete": "off"}


class NumberField(forms.CharField):
    """A measured figure as written: `<5`, `45,1`, `12 345`. Cleans to a ReadNumber, or None where none was measured."""

    def __init__(self, *, negative: bool = False, **more: Any) -> None:
        more.setdefault("widget", forms.TextInput(attrs=NUMBER_ATTRS))
        super().__init__(required=False, max_length=LONGEST_NUMBER, **more)
        self.negative = negative

    def clean(self, value: Any) -> ReadNumber | None:
        text = super().clean(value)
        number = read_number(text, negative=self.negative)
        if number.problem is not None:
            raise ValidationError(number.problem.sentence, code=number.problem.code)
        if number.state == "undetected":
            said = "“Not detected” needs the detection limit. Write it as a bound, for example <5."
            raise ValidationError(said, code="bound_unknown")
        return number if number.value is not None else None


class AmountField(NumberField):
    """A plain amount such as litres or hours, never a bound. Cleans to a float within [least, most], or None."""

    def __init__(self, *, least: float = 0.0, most: float, unit: str, **more: Any) -> None:
        super().__init__(negative=least < 0, **more)
        self.least, self.most, self.unit = least, most, unit

    def clean(self, value: Any) -> Any:
        number = super().clean(value)
        if number is None or number.value is None:
            return None
        if number.qualifier:
            said = f"“{number.reported}” is only a bound. Write the number alone."
            raise ValidationError(said, code="amount_is_bound")
        if not Decimal(str(self.least)) <= number.value <= Decimal(str(self.most)):
            said = f"“{number.reported}” is outside {self.least:,g} to {self.most:,g} {self.unit}. Check the number."
            raise ValidationError(said, code="amount_impossible")
        return float(number.value)


class DayField(forms.CharField):
    """A day of the site's calendar, as a date input sends it or as a person types it."""

    def __init__(self, **more: Any) -> None:
        attrs = {"type": "date", "class": "moment"}
        super().__init__(max_length=40, widget=forms.TextInput(attrs=attrs), **more)

    def clean(self, value: Any) -> date | None:
        text = super().clean(value)
        found = read_date(text)
        if found.problem is not None:
            raise ValidationError(found.problem.sentence, code=found.problem.code)
        return found.day


class ClockField(forms.CharField):
    """A time of day on the site's clock."""

    def __init__(self, **more: Any) -> None:
        attrs = {"type": "time", "class": "moment"}
        super().__init__(max_length=20, widget=forms.TextInput(attrs=attrs), **more)

    def clean(self, value: Any) -> time | None:
        text = super().clean(value)
        found = read_time(text)
        if found.problem is not None:
            raise ValidationError(found.problem.sentence, code=found.problem.code)
        return found.at
