"""How fast filtration cleans a well-mixed reservoir, and how clean it can get: one size class at a time.

V dC/dt = R/1000 - (Q·e/m)·C with V in litres, Q in L/min, R in particles >= size per minute and C in particles >= size
per mL. e is the single-pass efficiency at that size, 1 - 1/beta. m >= 1 is the mixing factor: 1 for a perfectly mixed
tank, more where the loop draws back its own clean oil (CDC, MMWR 1994;43(RR-13) uses up to 10 for rooms).
"""

from dataclasses import dataclass
from math import exp, log

ML_PER_LITRE = 1000.0


@dataclass(frozen=True)
class Loop:
    """A reservoir with its filtration and ingress at one size.

    volume_l > 0 (L), flow_l_min >= 0 (L/min), efficiency 0 to 1, ingress_per_min >= 0 (particles/min), mixing >= 1.
    Raises ValueError outside these.
    """

    volume_l: float
    flow_l_min: float
    efficiency: float
    ingress_per_min: float = 0.0
    mixing: float = 1.0

    def __post_init__(self) -> None:
        if not self.volume_l > 0 or not self.flow_l_min >= 0 or not self.ingress_per_min >= 0:
            raise ValueError("volume must be above nought, flow and ingress not below it")
        if not 0.0 <= self.efficiency <= 1.0 or not self.mixing >= 1.0:
            raise ValueError("efficiency lies between 0 and 1, the mixing factor is at least 1")

    @property
    def clearance_l_min(self) -> float:
        """Oil freed of this size per minute, L/min: flow x efficiency / mixing factor."""
        return self.flow_l_min * self.efficiency / self.mixing


def efficiency_from_beta(beta: float) -> float:
    """Single-pass efficiency (0 to 1) of a filtration ratio beta >= 1 at its size (ISO 16889)."""
    if not beta >= 1.0:
        raise ValueError("a beta ratio is at least 1")
    return 1.0 - 1.0 / beta


def beta_from_counts(upstream: float, downstream: float) -> float:
    """Filtration ratio from cumulative counts before and after a filter in one unit; downstream > 0 (ISO 16889)."""
    if not downstream > 0:
        raise ValueError("the count after the filter must be above nought")
    return upstream / downstream


def floor_per_ml(loop: Loop) -> float | None:
    """The count per mL that the loop settles at, R/(1000·Q·e/m); None where nothing is removed but something enters."""
    if loop.ingress_per_min == 0.0:
        return 0.0
    if loop.clearance_l_min == 0.0:
        return None
    return loop.ingress_per_min / (ML_PER_LITRE * loop.clearance_l_min)


def count_after(loop: Loop, start_per_ml: float, minutes: float) -> float:
    """The count per mL after `minutes` (>= 0) from `start_per_ml`, ingress going on all the while."""
    floor = floor_per_ml(loop)
    if floor is None:
        return start_per_ml + loop.ingress_per_min * minutes / (ML_PER_LITRE * loop.volume_l)
    return floor + (start_per_ml - floor) * exp(-loop.clearance_l_min * minutes / loop.volume_l)


def minutes_to(loop: Loop, start_per_ml: float, target_per_ml: float) -> float | None:
    """Minutes of running from `start_per_ml` down to `target_per_ml`; 0 when there already, None when never.

    Never: the floor is at or above the target.
    """
    if start_per_ml <= target_per_ml:
        return 0.0
    floor = floor_per_ml(loop)
    if floor is None or target_per_ml <= floor or loop.clearance_l_min == 0.0:
        return None
    return loop.volume_l / loop.clearance_l_min * log((start_per_ml - floor) / (target_per_ml - floor))


def downstream_per_ml(loop: Loop, reservoir_per_ml: float) -> float:
    """The count per mL right after the element when the reservoir holds `reservoir_per_ml`."""
    return reservoir_per_ml * (1.0 - loop.efficiency)


def turnovers(loop: Loop, minutes: float) -> float:
    """How many times the reservoir's volume passes the loop in `minutes`."""
    return loop.flow_l_min * minutes / loop.volume_l


def ingress_from_rise(volume_l: float, start_per_ml: float, end_per_ml: float, minutes: float) -> float:
    """Particles per minute that entered while nothing was removed, from two counts `minutes` (> 0) apart."""
    if not minutes > 0:
        raise ValueError("the two counts must lie apart in time")
    return ML_PER_LITRE * volume_l * (end_per_ml - start_per_ml) / minutes


def ingress_from_floor(loop: Loop, floor_count_per_ml: float) -> float:
    """Particles per minute that hold a steady `floor_count_per_ml` against the loop's clearance."""
    return ML_PER_LITRE * loop.clearance_l_min * floor_count_per_ml
