"""What happens to the reservoirs that have a story; days are told back from the end of the history."""

from collections.abc import Sequence
from dataclasses import dataclass

from samples.demo.simulator import Change, Treatment
from samples.trends.stretch import EventKind

HISTORY_DAYS = 1096
"""Three years."""


@dataclass(frozen=True)
class PlannedEvent:
    """Something done on one day of the history; `share` of the volume replaced for fresh oil where it was measured."""

    day: int
    kind: EventKind
    note: str
    share: float | None = None
    position: str = ""


@dataclass(frozen=True)
class Story:
    """What is different from an ordinary life.

    last_sample_ago: age of the latest sample in days, None for an ordinary one. dirty_bottles: which samples, counted
    back from the latest (1), came in a dirty bottle. ordinary_upkeep: whether elements are also changed once a year.
    """

    changes: tuple[Change, ...] = ()
    treatments: tuple[Treatment, ...] = ()
    events: tuple[PlannedEvent, ...] = ()
    last_sample_ago: float | None = None
    dirty_bottles: tuple[int, ...] = ()
    ordinary_upkeep: bool = True
    sampled: bool = True


def story_of(name: str, interval_days: int) -> Story:
    """The story of that name; an ordinary life for ''. Raises KeyError for a name nobody has written."""
    if name == "not current":
        return Story(last_sample_ago=2.4 * interval_days)
    if name == "overdue":
        return Story(last_sample_ago=1.35 * interval_days)
    return _STORIES[name]


def _ago(days: int) -> int:
    return HISTORY_DAYS - days


def _top_ups(ago: Sequence[int], share: float) -> tuple[tuple[Treatment, ...], tuple[PlannedEvent, ...]]:
    note = "Topped up; rod seal weeps."
    return (
        tuple(Treatment(_ago(day), fresh=share) for day in ago),
        tuple(PlannedEvent(_ago(day), EventKind.TOP_UP, note, share) for day in ago),
    )


_THIRST = _top_ups(range(20, 1000, 55), 0.04)
_STORIES: dict[str, Story] = {
    "": Story(),
    "breather failed": Story(
        changes=(Change(_ago(150), HISTORY_DAYS, ingress=3.0, climb=0.55),),
        events=(PlannedEvent(_ago(330), EventKind.ELEMENT_CHANGE, "Yearly element.", position="Return line"),),
        treatments=(Treatment(_ago(330), new_element=True),),
        last_sample_ago=13,
        ordinary_upkeep=False,
    ),
    "breather replaced": Story(
        changes=(Change(_ago(520), _ago(395), ingress=7.0),),
        events=(PlannedEvent(_ago(395), EventKind.BREATHER, "Breather found cracked, replaced.", position="Breather"),),
    ),
    "cooler leak": Story(
        changes=(Change(_ago(62), HISTORY_DAYS, water=55.0, ramp=60, sodium=0.35),),
        last_sample_ago=6,
    ),
    "bypassing element": Story(
        changes=(Change(_ago(118), HISTORY_DAYS, bypass=0.94),),
        events=(PlannedEvent(_ago(300), EventKind.ELEMENT_CHANGE, "Yearly element.", position="Pressure line"),),
        treatments=(Treatment(_ago(300), new_element=True),),
        last_sample_ago=9,
        ordinary_upkeep=False,
    ),
    "oil change": Story(
        changes=(
            Change(_ago(560), _ago(240), ingress=1.0, climb=0.25),
            Change(_ago(235), HISTORY_DAYS, ingress=1.3, climb=0.28),
        ),
        treatments=(Treatment(_ago(238), fresh=1.0, new_element=True, offline_minutes=300, offline_flow=40),),
        events=(
            PlannedEvent(_ago(239), EventKind.OIL_CHANGE, "Oil changed, tank wiped out, filled through the cart.", 1.0),
            PlannedEvent(_ago(239), EventKind.ELEMENT_CHANGE, "New element with the oil.", position="Return line"),
        ),
        last_sample_ago=19,
        ordinary_upkeep=False,
    ),
    "offline run": Story(
        changes=(Change(_ago(460), _ago(350), ingress=5.0),),
        treatments=(Treatment(_ago(350), offline_minutes=1440, offline_flow=60),),
        events=(PlannedEvent(_ago(350), EventKind.OFFLINE_RUN, "Filter cart for 24 h, wiper seal renewed."),),
    ),
    "dirty bottle": Story(last_sample_ago=12, dirty_bottles=(4,)),
    "bottle in doubt": Story(last_sample_ago=5, dirty_bottles=(1,)),
    "servo drift": Story(
        changes=(Change(_ago(270), HISTORY_DAYS, climb=0.37),),
        events=(PlannedEvent(_ago(340), EventKind.ELEMENT_CHANGE, "Yearly element.", position="Pressure line"),),
        treatments=(Treatment(_ago(340), new_element=True),),
        last_sample_ago=11,
        ordinary_upkeep=False,
    ),
    "creeping up": Story(
        changes=(Change(_ago(420), HISTORY_DAYS, climb=0.19),),
        last_sample_ago=24,
        ordinary_upkeep=False,
    ),
    "worn pump": Story(
        changes=(Change(_ago(260), HISTORY_DAYS, climb=0.33, iron=0.16, copper=0.05, ramp=120),),
        last_sample_ago=16,
        ordinary_upkeep=False,
    ),
    "thirsty": Story(treatments=_THIRST[0], events=_THIRST[1]),
    "no sample yet": Story(sampled=False, ordinary_upkeep=False),
}
