"""Which samples belong together: one sample point, one oil charge, one laboratory and method, since the last reset."""

from collections.abc import Hashable, Sequence
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike

from samples.trends.arrays import FloatArray, IntArray

SMALL_SHARE = 0.10
"""A known top-up or partial change below this share of the volume leaves the trend alone."""


class Family(StrEnum):
    """What a measurand tells of; events act on families."""

    DIRT = "dirt"
    WATER = "water"
    AGEING = "ageing"
    WEAR = "wear"
    OTHER = "other"


class EventKind(StrEnum):
    """What can be done to the oil or around it."""

    OIL_CHANGE = "oil_change"
    PARTIAL_CHANGE = "partial_change"
    TOP_UP = "top_up"
    ELEMENT_CHANGE = "element_change"
    OFFLINE_RUN = "offline_run"
    BREATHER = "breather"
    FILTER_REPAIR = "filter_repair"
    WEAR_REPAIR = "wear_repair"
    REPAIR_OTHER = "repair_other"
    WATER_REMOVED = "water_removed"
    METER_REPLACED = "meter_replaced"
    LABORATORY_CHANGE = "laboratory_change"
    OTHER = "other"


_EVERYTHING = frozenset(Family)
_DIRT = frozenset({Family.DIRT})
_RESETS: dict[EventKind, frozenset[Family]] = {
    EventKind.OIL_CHANGE: _EVERYTHING,
    EventKind.PARTIAL_CHANGE: _EVERYTHING,
    EventKind.TOP_UP: _EVERYTHING,
    EventKind.LABORATORY_CHANGE: _EVERYTHING,
    EventKind.ELEMENT_CHANGE: _DIRT,
    EventKind.OFFLINE_RUN: _DIRT,
    EventKind.BREATHER: _DIRT,
    EventKind.FILTER_REPAIR: _DIRT,
    # Drying also takes out the droplets that a counter sees as particles.
    EventKind.WATER_REMOVED: frozenset({Family.DIRT, Family.WATER}),
    EventKind.WEAR_REPAIR: frozenset({Family.DIRT, Family.WEAR}),
}
_DILUTIONS = frozenset({EventKind.PARTIAL_CHANGE, EventKind.TOP_UP})


@dataclass(frozen=True)
class EventMark:
    """One event on the time line: `at` in days, litres of fresh oil where known."""

    at: float
    kind: EventKind
    litres: float | None = None


@dataclass(frozen=True)
class Stretch:
    """Samples that may share a trend: their positions in time order, what they share, and the event that began it."""

    positions: IntArray
    key: Hashable
    begun_by: int | None
    """Position of the resetting event in the sequence given, None where none came before."""


def resets(kind: EventKind, family: Family, litres: float | None, volume: float | None) -> bool:
    """Whether an event ends the stretch of a family of measurands; litres and volume in litres where known.

    An event of unknown effect (repair_other, meter_replaced, other) ends none; it is only drawn.
    """
    small = litres is not None and volume is not None and volume > 0 and litres < SMALL_SHARE * volume
    if kind in _DILUTIONS and small:
        return False
    return family in _RESETS.get(kind, frozenset())


def split(
    days: ArrayLike, keys: Sequence[Hashable], events: Sequence[EventMark], family: Family, volume: float | None
) -> list[Stretch]:
    """All stretches of one reservoir's measurand, in the order in which they begin.

    `days`: when each sample was drawn, shape (n,), in any order. `keys`: what must be equal inside a stretch (sample
    point, oil charge, laboratory, method, size scale). A sample drawn at the moment of an event is of the oil after it,
    as an oil charge begins with its first moment.
    """
    drawn = np.asarray(days, dtype=np.float64)
    order = np.argsort(drawn, kind="stable")
    cutting = sorted((e.at, i) for i, e in enumerate(events) if resets(e.kind, family, e.litres, volume))
    segments = segment_numbers(drawn, np.array([at for at, _ in cutting], dtype=np.float64))
    groups: dict[tuple[int, Hashable], list[int]] = {}
    for position in order.tolist():
        groups.setdefault((int(segments[position]), keys[position]), []).append(position)
    return [
        Stretch(np.array(members, dtype=np.int64), key, cutting[segment - 1][1] if segment else None)
        for (segment, key), members in groups.items()
    ]


def segment_numbers(days: FloatArray, reset_days: FloatArray) -> IntArray:
    """How many of the sorted `reset_days` came before each sample or with it, shape (n,); equal ones share a trend."""
    return np.searchsorted(reset_days, days, side="right").astype(np.int64)


def latest(stretches: Sequence[Stretch], days: ArrayLike) -> Stretch | None:
    """The stretch that holds the latest sample, None without samples."""
    drawn = np.asarray(days, dtype=np.float64)
    return max(stretches, key=lambda s: float(drawn[s.positions[-1]]), default=None)
