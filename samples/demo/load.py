"""Writes the invented mill into an empty database: the register, three years of samples, and today's outlooks."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from typing import Any

from django.db import transaction

from fleet.models import (
    Area,
    Element,
    Event,
    FilterPosition,
    Fluid,
    Limit,
    Machine,
    Measurand,
    OilCharge,
    Reservoir,
    ReservoirClass,
    SamplePoint,
    Site,
    Target,
)
from samples.coding.iso4406 import code_from_counts
from samples.demo.mill import FLUIDS, LABORATORIES, MILL, Code, Figures, PlannedFluid, PlannedReservoir
from samples.demo.plan import History, SimulatedEvent, SimulatedSample, fernhollow
from samples.demo.stories import HISTORY_DAYS, story_of
from samples.history import read_history
from samples.models import Doubt, Laboratory, Result, Sample
from samples.outlooks import refresh_outlook
from samples.readings import COUNTER_SIZES, Reading, readings_from_code
from samples.results import SampleEntry, SampleFacts, preview

SOURCE = "Made up for the demo"
ZONE = "Europe/Vienna"
POINT = "SP-1"
DENSITY_KG_L = 0.87
COUNTED_ML = 25.0
CLASSES = {
    "hydraulic": ReservoirClass.HYDRAULIC,
    "gearbox": ReservoirClass.GEARBOX,
    "turbine_lube": ReservoirClass.TURBINE,
    "compressor": ReservoirClass.COMPRESSOR,
    "paper_machine_lube": ReservoirClass.PAPER,
    "bearing_sump": ReservoirClass.BEARING,
}
HAZARDS = {"hydraulic": "Pressure, hot oil", "turbine_lube": "Hot oil, rotating parts"}


class NotEmptyError(ValueError):
    """The database holds real data, which a demo must never mix with."""


@dataclass(frozen=True)
class Written:
    """One reservoir as written, with what later rows refer to."""

    plan: PlannedReservoir
    reservoir: Reservoir
    point: SamplePoint
    fluid: Fluid
    positions: dict[str, FilterPosition]


def is_loaded() -> bool:
    return Site.objects.filter(is_demo=True).exists()


def load(as_of: datetime) -> Site:
    """The whole mill up to `as_of`, in one transaction. Raises NotEmptyError where any other site is registered."""
    if Site.objects.filter(is_demo=False).exists():
        raise NotEmptyError(
            "This database holds a plant of its own, and demo data is never mixed with real data. Use an empty one."
        )
    with transaction.atomic():
        return _load(as_of)


def _load(as_of: datetime) -> Site:
    site = Site.objects.create(name=MILL, time_zone=ZONE, is_demo=True)
    fluids = {plan.name: _fluid(plan) for plan in FLUIDS.values()}
    laboratories = {name: Laboratory.objects.create(name=name, notes=SOURCE) for name in LABORATORIES}
    measurands = {measurand.key: measurand for measurand in Measurand.objects.all()}
    for history in fernhollow(as_of):
        written = _register(site, history, fluids, as_of)
        _set_figures(written, measurands, as_of.date() - timedelta(days=HISTORY_DAYS))
        charges = _write_events(written, history)
        _write_samples(written, history, charges, laboratories, measurands)
        _doubt_dirty_bottles(written, history, measurands, as_of)
        refresh_outlook(written.reservoir.pk, as_of)
    return site


def _fluid(plan: PlannedFluid) -> Fluid:
    grade = "".join(character for character in plan.name if character.isdigit())
    return Fluid.objects.create(
        name=plan.name,
        viscosity_grade=int(grade) if grade else None,
        viscosity_40=plan.viscosity,
        acid_number=plan.acid_number,
        density_kg_l=DENSITY_KG_L,
        notes=SOURCE,
    )


def _register(site: Site, history: History, fluids: dict[str, Fluid], as_of: datetime) -> Written:
    plan = history.reservoir
    area, _ = Area.objects.get_or_create(site=site, name=plan.area)
    machine, _ = Machine.objects.get_or_create(area=area, name=plan.machine)
    reservoir = Reservoir.objects.create(
        area=area,
        machine=machine,
        name=plan.name,
        tag=plan.tag,
        reservoir_class=CLASSES[plan.profile.kind],
        criticality=plan.criticality,
        volume_l=plan.volume_l,
        pump_flow_l_min=round(plan.flow_l_min, 1) if plan.profile.element else None,
        cooler="water" if _is_water_cooled(plan) else "none",
        breather=next((f.element for f in plan.filters if f.flow_l_min is None), ""),
        hazards=HAZARDS.get(plan.profile.kind, ""),
        interval_days=plan.interval_days,
        notes=SOURCE,
    )
    point = SamplePoint.objects.create(reservoir=reservoir, name=POINT, place=plan.profile.point, is_default=True)
    positions = {f.position: _position(reservoir, f, history, as_of) for f in plan.filters}
    return Written(plan, reservoir, point, fluids[plan.fluid.name], positions)


def _is_water_cooled(plan: PlannedReservoir) -> bool:
    return plan.profile.kind in {"turbine_lube", "compressor", "paper_machine_lube"}


def _position(reservoir: Reservoir, plan: Any, history: History, as_of: datetime) -> FilterPosition:
    """A filter position with its elements: one from the start, and a new one at each element change."""
    is_breather = plan.flow_l_min is None
    position = FilterPosition.objects.create(
        reservoir=reservoir,
        name=plan.position,
        place=FilterPosition.Place.BREATHER if is_breather else _place(plan.position),
        flow_l_min=plan.flow_l_min,
        has_bypass=not is_breather,
    )
    days = [history.filled_at.date(), *sorted({e.at.date() for e in history.events if _fits(e, plan.position)})]
    Element.objects.bulk_create(
        Element(
            position=position,
            part=plan.element,
            rating_um=plan.rating_um,
            rating_kind=Element.RatingKind.BETA,
            beta=plan.beta,
            beta_size_um=plan.beta_size_um,
            fitted_on=fitted,
            removed_on=removed,
        )
        for fitted, removed in zip(days, [*days[1:], None], strict=True)
    )
    return position


def _place(name: str) -> str:
    places = {"Pressure line": "pressure", "Return line": "return", "Offline loop": "offline"}
    return places.get(name, FilterPosition.Place.PRESSURE)


def _fits(event: SimulatedEvent, position: str) -> bool:
    return event.position == position and event.kind in {"element_change", "breather"}


def _set_figures(written: Written, measurands: dict[str, Measurand], since: date) -> None:
    plan = written.plan
    shared = {"scope": "reservoir", "reservoir": written.reservoir, "valid_from": since, "source": SOURCE}
    code = {**shared, "measurand": measurands["iso4406"]}
    Target.objects.create(**code, code=_code(plan.target))
    Limit.objects.create(**code, code=_code(plan.limit))
    for name, figures in plan.figures.items():
        key = "viscosity_40" if name == "viscosity" else name
        basis = "percent" if name == "viscosity" else "absolute"
        _set_pair({**shared, "measurand": measurands[key], "basis": basis}, figures)


def _set_pair(shared: dict[str, Any], figures: Figures) -> None:
    Target.objects.create(**shared, high=figures.target_high, low=figures.target_low)
    Limit.objects.create(**shared, high=figures.limit_high, low=figures.limit_low)


def _code(numbers: Code) -> str:
    return "/".join(str(number) for number in numbers)


def _write_events(written: Written, history: History) -> list[OilCharge]:
    """The events, and an oil charge for the first filling and for each oil change."""
    Event.objects.bulk_create(
        Event(
            reservoir=written.reservoir,
            kind=event.kind,
            at=event.at,
            litres=event.litres,
            fluid=written.fluid if event.litres else None,
            note=event.note,
        )
        for event in history.events
    )
    starts = [history.filled_at, *(event.at for event in history.events if event.kind == "oil_change")]
    return [
        OilCharge.objects.create(
            reservoir=written.reservoir,
            fluid=written.fluid,
            started_at=start,
            ended_at=end,
            volume_l=written.plan.volume_l,
        )
        for start, end in zip(starts, [*starts[1:], None], strict=True)
    ]


def _write_samples(
    written: Written,
    history: History,
    charges: Sequence[OilCharge],
    laboratories: dict[str, Laboratory],
    measurands: dict[str, Measurand],
) -> None:
    samples = Sample.objects.bulk_create(
        _sample(written, simulated, charges, laboratories) for simulated in history.samples
    )
    Result.objects.bulk_create(
        result
        for sample, simulated in zip(samples, history.samples, strict=True)
        for result in _results(sample, simulated, measurands)
    )


def _doubt_dirty_bottles(written: Written, history: History, measurands: dict[str, Measurand], as_of: datetime) -> None:
    """What the checks say of a bottle that was dirty: an old one was set aside, the latest waits for a person."""
    for back in story_of(written.plan.story, written.plan.interval_days).dirty_bottles:
        record = read_history(written.reservoir)
        sample = record.samples[-back]
        facts = SampleFacts(drawn_at=sample.drawn_at, machine_hours=sample.machine_hours)
        entry = SampleEntry(
            written.reservoir, written.point, sample.laboratory, facts, _readings(history.samples[-back])
        )
        for doubt in preview(entry, record, as_of, measurands).doubts:
            Doubt.objects.create(sample=sample, code=doubt.code, sentence=doubt.sentence, settles=doubt.settles)
        sample.verdict = Sample.Verdict.IN_DOUBT if back == 1 else Sample.Verdict.SET_ASIDE
        sample.verdict_reason = "" if back == 1 else "The bottle was dirty; the repeat was clean."
        sample.save(update_fields=["verdict", "verdict_reason"])


def _sample(
    written: Written, simulated: SimulatedSample, charges: Sequence[OilCharge], laboratories: dict[str, Laboratory]
) -> Sample:
    charge = next(c for c in reversed(charges) if c.started_at <= simulated.drawn_at or c is charges[0])
    return Sample(
        reservoir=written.reservoir,
        point=written.point,
        charge=charge,
        drawn_at=simulated.drawn_at,
        reported_at=simulated.reported_at,
        entered_at=simulated.reported_at,
        method=Sample.Method.LIVE_VALVE,
        running=True,
        machine_hours=simulated.machine_hours,
        oil_hours=simulated.oil_hours,
        litres_added=simulated.litres_added,
        laboratory=laboratories[simulated.laboratory],
        lab_number=simulated.laboratory_number,
    )


def _results(sample: Sample, simulated: SimulatedSample, measurands: dict[str, Measurand]) -> Iterator[Result]:
    for reading in _readings(simulated):
        yield Result(
            sample=sample,
            measurand=measurands[reading.measurand],
            reported_text=reading.reported_text,
            reported_unit=reading.reported_unit,
            qualifier=reading.qualifier,
            value=reading.value,
            low=reading.low,
            high=reading.high,
            size_scale=reading.size_scale,
            counted_ml=reading.counted_ml,
            entered_at=sample.entered_at,
        )


def _readings(simulated: SimulatedSample) -> list[Reading]:
    counts = [round(count, 1) for count in simulated.counts]
    if simulated.codes_only:
        readings = readings_from_code(code_from_counts(*counts))
    else:
        readings = [
            Reading(
                key, count, reported_text=f"{count:g}", reported_unit="1/mL", size_scale="um_c", counted_ml=COUNTED_ML
            )
            for key, count in zip(COUNTER_SIZES, counts, strict=True)
        ]
    plain = {
        "water": (round(simulated.water), "mg/kg"),
        "viscosity_40": (round(simulated.viscosity, 1), "mm²/s"),
        "acid_number": (round(simulated.acid_number, 2), "mg KOH/g"),
        **{key: (round(value), "mg/kg") for key, value in simulated.metals.items()},
    }
    return readings + [
        Reading(key, float(value), reported_text=f"{value:g}", reported_unit=unit)
        for key, (value, unit) in plain.items()
    ]
