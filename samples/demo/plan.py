"""The three years of Fernhollow Board Mill up to a day: samples and events ready to be written down; all invented."""

from dataclasses import dataclass
from datetime import datetime, time, timedelta
from zlib import crc32

import numpy as np

from samples.demo.mill import PlannedReservoir, reservoirs
from samples.demo.simulator import Condition, Filter, Oil, Report, Treatment, TrueOil, report, simulate
from samples.demo.stories import HISTORY_DAYS, PlannedEvent, Story, story_of
from samples.trends.stretch import EventKind

DEFAULT_SEED = 8
FIRST_CHARGE_AGE_DAYS = 120
COUNT_UNIT_PER_ML = 0.01
NEW_SYSTEM_DAYS = 24


@dataclass(frozen=True)
class Clock:
    """What the technician writes beside the bottle: hours on the meters and litres added since the last one."""

    machine_hours: float
    oil_hours: float
    litres_added: float


@dataclass(frozen=True)
class SimulatedSample:
    """One bottle with what the laboratory reported.

    counts: particles per mL at 4, 6 and 14 µm(c); `codes_only` means that the laboratory gave only their ISO 4406 code.
    water and metals (fe, cu, si, na) in mg/kg, viscosity at 40 °C in mm²/s, acid number in mg KOH/g.
    """

    drawn_at: datetime
    reported_at: datetime
    sample_point: str
    laboratory: str
    laboratory_number: str
    counts: tuple[float, float, float]
    codes_only: bool
    water: float
    viscosity: float
    acid_number: float
    metals: dict[str, float]
    machine_hours: float
    oil_hours: float
    litres_added: float


@dataclass(frozen=True)
class SimulatedEvent:
    """Something done to the oil: `litres` of fresh oil and the filter position where they apply."""

    at: datetime
    kind: EventKind
    note: str
    litres: float | None
    position: str


@dataclass(frozen=True)
class History:
    """All that happened to one reservoir, each list in order of time; `filled_at` begins its first oil charge."""

    reservoir: PlannedReservoir
    filled_at: datetime
    samples: tuple[SimulatedSample, ...]
    events: tuple[SimulatedEvent, ...]


def fernhollow(as_of: datetime, seed: int = DEFAULT_SEED) -> tuple[History, ...]:
    """The whole mill up to `as_of` (with a time zone); the same seed gives the same plant, moved to that day."""
    return tuple(history(reservoir, as_of, seed) for reservoir in reservoirs())


def history(reservoir: PlannedReservoir, as_of: datetime, seed: int = DEFAULT_SEED) -> History:
    """Three years of one reservoir up to `as_of`; the last sample was drawn before that day began."""
    rng = np.random.default_rng([seed, crc32(reservoir.tag.encode())])
    story = story_of(reservoir.story, reservoir.interval_days)
    if not story.sampled:
        return History(reservoir, _moment(as_of, HISTORY_DAYS - NEW_SYSTEM_DAYS, 9.0), (), ())
    events, treatments = _life(reservoir, story, rng)
    oil = simulate(_condition(reservoir, story, treatments), rng)
    samples = _samples(reservoir, story, oil=oil, events=events, as_of=as_of, rng=rng)
    done = tuple(_event(reservoir, event, as_of) for event in sorted(events, key=lambda e: e.day))
    return History(reservoir, _moment(as_of, -FIRST_CHARGE_AGE_DAYS, 9.0), samples, done)


def _life(
    reservoir: PlannedReservoir, story: Story, rng: np.random.Generator
) -> tuple[list[PlannedEvent], list[Treatment]]:
    """The story's events with the ordinary upkeep around them."""
    events, treatments = list(story.events), list(story.treatments)
    position = reservoir.filters[0].position
    if story.ordinary_upkeep and reservoir.profile.element:
        for day in range(int(rng.integers(20, 380)), HISTORY_DAYS - 5, 380):
            events.append(PlannedEvent(day, EventKind.ELEMENT_CHANGE, "Yearly element.", position=position))
            treatments.append(Treatment(day, new_element=True))
    if story.ordinary_upkeep and not reservoir.profile.element and rng.random() < 0.6:
        day = int(rng.integers(200, HISTORY_DAYS - 250))
        events.append(PlannedEvent(day, EventKind.OIL_CHANGE, "Oil changed as planned.", 1.0))
        treatments.append(Treatment(day, fresh=1.0))
    for day in sorted(int(d) for d in rng.integers(30, HISTORY_DAYS - 20, 3)):
        share = float(rng.uniform(0.01, 0.05))
        events.append(PlannedEvent(day, EventKind.TOP_UP, "Topped up to the mark.", share))
        treatments.append(Treatment(day, fresh=share))
    return events, treatments


def _condition(reservoir: PlannedReservoir, story: Story, treatments: list[Treatment]) -> Condition:
    profile, fluid = reservoir.profile, reservoir.fluid
    return Condition(
        volume_l=reservoir.volume_l,
        filter=Filter(reservoir.flow_l_min, profile.betas, wear_per_day=0.0006 if profile.element else 0.0),
        usual_per_ml=_usual(reservoir),
        oil=Oil(fluid.viscosity, fluid.acid_number, fluid.viscosity_percent_a_month, fluid.acid_a_month),
        days=HISTORY_DAYS,
        # A story is easier to find where the dirt wanders less by itself.
        restlessness=0.10 if reservoir.story else 0.22,
        water_usual=profile.water_usual,
        wear=profile.wear,
        changes=story.changes,
        treatments=_merged(treatments),
    )


def _usual(reservoir: PlannedReservoir) -> tuple[float, float, float]:
    """The counts per mL that lie `ease` code steps below the target numbers."""
    four, six, fourteen = (COUNT_UNIT_PER_ML * 2.0 ** (number - reservoir.ease) for number in reservoir.target)
    return four, six, fourteen


def _merged(treatments: list[Treatment]) -> tuple[Treatment, ...]:
    """One treatment a day: where two fall together the one that replaces more oil is kept."""
    by_day: dict[int, Treatment] = {}
    for treatment in sorted(treatments, key=lambda t: t.fresh):
        by_day[treatment.day] = treatment
    return tuple(by_day[day] for day in sorted(by_day))


def _sampling_days(reservoir: PlannedReservoir, story: Story, rng: np.random.Generator) -> list[int]:
    """Days of drawing, the latest last: an interval apart, give or take."""
    interval = reservoir.interval_days
    ago = story.last_sample_ago if story.last_sample_ago is not None else rng.uniform(2.0, 0.95 * interval)
    days: list[int] = []
    while (day := HISTORY_DAYS - 1 - int(ago)) >= 5:
        days.append(day)
        ago += interval * float(np.clip(rng.normal(1.0, 0.1), 0.75, 1.4))
    return days[::-1]


def _samples(
    reservoir: PlannedReservoir,
    story: Story,
    *,
    oil: TrueOil,
    events: list[PlannedEvent],
    as_of: datetime,
    rng: np.random.Generator,
) -> tuple[SimulatedSample, ...]:
    days = _sampling_days(reservoir, story, rng)
    dirty = {days[-back] for back in story.dirty_bottles}
    hours_a_day = float(rng.uniform(15.0, 22.0))
    previous, samples = 0, []
    for number, day in enumerate(days, start=1):
        found = report(oil, day, rng, dirty_bottle=day in dirty)
        added = sum(e.share or 0.0 for e in events if e.kind is EventKind.TOP_UP and previous < e.day <= day)
        clock = Clock(
            machine_hours=float(round(hours_a_day * (day + FIRST_CHARGE_AGE_DAYS))),
            oil_hours=float(round(hours_a_day * float(oil.oil_age_days[day]))),
            litres_added=round(added * reservoir.volume_l, 1),
        )
        samples.append(_bottle(reservoir, found, day=day, number=number, clock=clock, as_of=as_of))
        previous = day
    return tuple(samples)


def _bottle(
    reservoir: PlannedReservoir,
    found: Report,
    *,
    day: int,
    number: int,
    clock: Clock,
    as_of: datetime,
) -> SimulatedSample:
    drawn = _moment(as_of, day, 7.0 + (day * 7 + number) % 8 + 0.25)
    return SimulatedSample(
        drawn_at=drawn,
        reported_at=min(drawn + timedelta(days=2 + day % 4), as_of),
        sample_point=reservoir.profile.point,
        laboratory=reservoir.laboratory,
        laboratory_number=f"{reservoir.laboratory[:1]}{reservoir.tag.replace('-', '')}{number:03d}",
        counts=found.counts,
        codes_only=reservoir.codes_only,
        water=found.water,
        viscosity=found.viscosity,
        acid_number=found.acid_number,
        metals=found.metals,
        machine_hours=clock.machine_hours,
        oil_hours=clock.oil_hours,
        litres_added=clock.litres_added,
    )


def _event(reservoir: PlannedReservoir, event: PlannedEvent, as_of: datetime) -> SimulatedEvent:
    litres = None if event.share is None else round(event.share * reservoir.volume_l, 1)
    return SimulatedEvent(_moment(as_of, event.day, 6.5), event.kind, event.note, litres, event.position)


def _moment(as_of: datetime, day: int, hour: float) -> datetime:
    """A time of day on a day of the history; the last day is the one before `as_of`."""
    date = as_of.date() - timedelta(days=HISTORY_DAYS - day)
    return datetime.combine(date, time(), tzinfo=as_of.tzinfo) + timedelta(hours=hour)
