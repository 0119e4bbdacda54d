"""The form by which one result is logged."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from datetime import datetime
from decimal import Decimal
from typing import Any, cast

from django import forms
from django.core.exceptions import ValidationError
from django.utils.functional import cached_property

from fleet.models import Measurand, SamplePoint
from samples.coding.pasted import Pasted, read_pasted
from samples.drawn_moments import drawn_moment
from samples.forms.fields import AmountField, ClockField, DayField, NumberField
from samples.history import History
from samples.intake.numbers import ReadNumber
from samples.models import Laboratory, Sample
from samples.particles import Particles, TypedCounts, read_particles
from samples.readings import ELEMENTS, Reading, reading_of
from samples.results import EntryError, SampleEntry, SampleFacts

BASES = [("", "per …"), ("per_ml", "per mL"), ("per_100ml", "per 100 mL")]
WATER_UNITS = [("mg/kg", "mg/kg (ppm)"), ("%", "%")]
RUNNING = [("", "not noted"), ("yes", "running"), ("no", "idle")]
MEASURED = ("water", "viscosity_40", "viscosity_100", "acid_number", "base_number", *ELEMENTS)
FACTS = (
    *("method", "reason", "drawn_by", "running", "oil_temperature_c", "machine_hours", "oil_hours", "litres_added"),
    *("lab_number", "label_code", "bottle_lot", "remark"),
)
FOLDED = ("viscosity_100", "base_number", *ELEMENTS, "oil_hours", "drawn_by", "bottle_lot")
# Where an error of the subject module is shown.
SHOWN_AT = {"drawn_at": "drawn_on", "counts": "p4", "p5m": "p6", "p15m": "p14"}
PASTE_ATTRS = {"autocomplete": "off", "placeholder": "19/17/13, or 39120 9610 710 /100 ml, or a line of a mail"}


class LogForm(forms.Form):
    """One bottle of one reservoir. `history` is None while the reservoir is not known."""

    reservoir = forms.CharField(max_length=40, widget=forms.HiddenInput())
    point = forms.ModelChoiceField(SamplePoint.objects.none(), label="Sample point", empty_label=None)
    drawn_on = DayField(label="Drawn")
    drawn_time = ClockField(label="Time drawn", required=False)
    oil_temperature_c = AmountField(label="Oil temperature", least=-40, most=200, unit="°C")
    running = forms.TypedChoiceField(
        choices=RUNNING, required=False, coerce=lambda text: text == "yes", empty_value=None, label="Machine"
    )
    method = forms.ChoiceField(choices=Sample.Method, initial=Sample.Method.UNKNOWN, label="How drawn")
    reason = forms.ChoiceField(choices=Sample.Reason, initial=Sample.Reason.ROUTINE, label="Why drawn")
    machine_hours = AmountField(most=1e7, unit="h")
    litres_added = AmountField(label="Oil added since", most=1e6, unit="L")
    laboratory = forms.ModelChoiceField(Laboratory.objects.all(), required=False, empty_label="not named")
    lab_number = forms.CharField(label="Its number", required=False, max_length=60)
    label_code = forms.CharField(label="Bottle label", required=False, max_length=40)
    paste = forms.CharField(
        label="Paste a code or counts", required=False, max_length=2000, widget=forms.TextInput(attrs=PASTE_ATTRS)
    )
    p4 = NumberField(label="≥4 µm(c)")
    p6 = NumberField(label="≥6 µm(c)")
    p14 = NumberField(label="≥14 µm(c)")
    basis = forms.ChoiceField(choices=BASES, required=False, label="Counts are")
    counted_ml = AmountField(label="Counted, mL", least=0.001, most=10_000, unit="mL")
    microscope = forms.BooleanField(label="5 and 15 µm under the microscope", required=False)
    by_counter = forms.BooleanField(label="Two pasted numbers are 6 and 14 µm", required=False)
    water = NumberField(label="Water")
    water_unit = forms.ChoiceField(choices=WATER_UNITS, required=False, initial="mg/kg", label="Unit of water")
    viscosity_40 = NumberField(label="Viscosity at 40 °C")
    viscosity_100 = NumberField(label="Viscosity at 100 °C")
    acid_number = NumberField(label="Acid number")
    base_number = NumberField(label="Base number")
    oil_hours = AmountField(label="Hours on the oil", most=1e7, unit="h")
    drawn_by = forms.CharField(label="Drawn by", required=False, max_length=80)
    bottle_lot = forms.CharField(label="Bottle lot", required=False, max_length=40)
    remark = forms.CharField(required=False, max_length=2000, widget=forms.Textarea(attrs={"rows": 2}))

    def __init__(
        self, *args: Any, history: History | None, known: Mapping[str, Measurand], now: datetime, **more: Any
    ) -> None:
        super().__init__(*args, **more)
        self.history, self.now = history, now
        self.moment: datetime | None = None
        self.particles = Particles()
        self.measured: list[Reading] = []
        for key in ELEMENTS:
            self.fields[key] = NumberField(label=f"{known[key].name}, {known[key].symbol}")
        self._say_plainly()
        if not self.is_bound:
            self.fields["point"].widget.attrs["autofocus"] = True
        if history is not None:
            points = SamplePoint.objects.filter(reservoir=history.reservoir, retired_on=None)
            self._chooser("point").queryset = points
            self.fields["point"].initial = points.filter(is_default=True).first()

    def _say_plainly(self) -> None:
        wrong_choice = {
            "point": "That is not a sample point of this reservoir. Choose one of the list.",
            "basis": "Counts are per mL or per 100 mL. Choose one of the two.",
            "water_unit": "Water is in mg/kg or %%. Choose one of the two.",
            "laboratory": "That laboratory is not registered. Choose one of the list.",
        }
        for name, sentence in wrong_choice.items():
            self.fields[name].error_messages["invalid_choice"] = sentence
        self.fields["drawn_on"].error_messages["required"] = "Give the day on which the sample was drawn."
        self.fields["point"].error_messages["required"] = "Choose the point where the bottle was filled."
        self.fields["reservoir"].error_messages["required"] = "Choose a reservoir first."

    def _chooser(self, name: str) -> forms.ModelChoiceField[Any]:
        return cast("forms.ModelChoiceField[Any]", self.fields[name])

    def clean_reservoir(self) -> str:
        tag: str = self.cleaned_data["reservoir"]
        if self.history is None:
            said = f"No reservoir in service carries the tag “{tag}”. Find it by typing a few letters of its name."
            raise ValidationError(said, code="reservoir_unknown")
        return tag

    def clean(self) -> dict[str, Any]:
        self._clean_moment()
        self._clean_particles()
        self._clean_measured()
        if not self.errors and not self.readings:
            said = "There is no result yet. Paste a code or counts, or fill in at least one figure."
            self.add_error("paste", ValidationError(said, code="no_result"))
        return self.cleaned_data

    def _clean_moment(self) -> None:
        day = self.cleaned_data.get("drawn_on")
        if day is None or self.history is None or "drawn_time" in self.errors:
            return
        zone = self.history.reservoir.area.site.zone
        here = self.now.astimezone(zone)
        if day > here.date():
            said = f"That day is still to come; today is {here:%-d %b %Y}. Check the date on the bottle."
            self.add_error("drawn_on", ValidationError(said, code="drawn_in_future"))
            return
        try:
            moment = drawn_moment(day, self.cleaned_data["drawn_time"], zone, self.now)
        except ValueError as error:
            self.add_error("drawn_time", ValidationError(str(error), code="clock_gap"))
            return
        if moment > self.now:
            said = f"That time is still to come; it is {here:%H:%M} at the site. Check the time."
            self.add_error("drawn_time", ValidationError(said, code="drawn_in_future"))
            return
        self.moment = moment

    def _clean_particles(self) -> None:
        if self.errors.keys() & {"paste", "p4", "p6", "p14", "basis", "counted_ml"}:
            return
        text = self.cleaned_data.get("paste", "")
        laboratory = self.cleaned_data.get("laboratory")
        usual = laboratory.counted_ml if laboratory else None
        self.particles = read_particles(read_pasted(text) if text else Pasted(), self._typed_counts(), usual)
        for name, problem in self.particles.problems:
            self.add_error(name, ValidationError(problem.sentence, code=problem.code))

    def _typed_counts(self) -> TypedCounts:
        chosen = self.cleaned_data
        volume = chosen.get("counted_ml")
        return TypedCounts(
            counts=(chosen.get("p4"), chosen.get("p6"), chosen.get("p14")),
            basis=chosen.get("basis") or None,
            counted_ml=None if volume is None else Decimal(repr(volume)),
            microscope=bool(chosen.get("microscope")),
            by_counter=bool(chosen.get("by_counter")),
        )

    def _clean_measured(self) -> None:
        for name in MEASURED:
            number: ReadNumber | None = self.cleaned_data.get(name)
            if number is None:
                continue
            unit = self.cleaned_data.get("water_unit", "") if name == "water" else ""
            if name == "water" and not unit:
                if "water_unit" not in self.errors:
                    said = "Choose the unit of water: mg/kg or %. They differ by 10 000."
                    self.add_error("water_unit", ValidationError(said, code="unit_missing"))
                continue
            reading = reading_of(name, number, unit)
            if reading is not None:
                self.measured.append(reading)

    @property
    def readings(self) -> list[Reading]:
        return [*self.particles.readings, *self.measured]

    @cached_property
    def entry(self) -> SampleEntry | None:
        """What would be saved; None while the reservoir, the point or the moment is not known."""
        point = self.cleaned_data.get("point")
        if self.history is None or point is None or self.moment is None:
            return None
        facts = {name: self.cleaned_data[name] for name in FACTS if name in self.cleaned_data}
        return SampleEntry(
            reservoir=self.history.reservoir,
            point=point,
            laboratory=self.cleaned_data.get("laboratory"),
            facts=SampleFacts(drawn_at=self.moment, **facts),
            readings=self.readings,
            stated_code=self.particles.stated_code,
        )

    def say(self, error: EntryError) -> None:
        """Show at its field what the subject module refuses, once."""
        if any(error.sentence in sentences for sentences in self.errors.values()):
            return
        name = SHOWN_AT.get(error.field, error.field)
        self.add_error(name if name in self.fields else None, ValidationError(error.sentence, code=error.code))

    def needs_more(self) -> bool:
        """Whether something stands in the part of the form that is folded away."""
        return any(self[name].value() for name in FOLDED)

    def metals(self) -> Iterator[forms.BoundField]:
        return (self[key] for key in ELEMENTS)
