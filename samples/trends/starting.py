"""Parameters to begin with, until a plant has enough samples of its own to learn from.

Counts come from a simulated fleet of 700 reservoirs with interventions, element ageing, bypass and gross errors. The
others come from 400 reservoirs of the simulator in `samples.demo.simulator`, sampled every 14 to 182 days (11,741
one-step predictions; `python -m tests.trends.derive_starting_values` prints them), rounded. The fit of water finds no
lasting drift at all; 0.01 keeps the drift defined.
"""

from dataclasses import dataclass

from samples.trends.level import LevelParameters
from samples.trends.scales import Scale
from samples.trends.stretch import Family

STARTING_NAME = "starting values, from simulation"


@dataclass(frozen=True)
class StartingValues:
    """Parameters with the words that say where they come from."""

    parameters: LevelParameters
    name: str = STARTING_NAME


_COUNTS = (0.20, 0.08, 0.05)
_WATER = (0.020, 0.020, 0.01)
_METALS = (0.005, 0.015, 0.05)
_PERCENT = (0.010, 0.13, 0.10)
_LINEAR = (1e-4, 3e-4, 0.012)


def starting_values(scale: Scale, family: Family, span: float = 1.0) -> StartingValues:
    """Starting values of a measurand, on its scale and per month.

    `span` (> 0, unit of the result) serves the linear scale only: the distance from the fresh charge's value to the
    limit in which the values were found is 1 mg KOH/g of acid number, the default; for anything else they are
    stretched to its span.
    """
    if not span > 0:
        raise ValueError("the span from the fresh value to the limit must be above nought")
    if scale is Scale.COUNT:
        return StartingValues(LevelParameters(*_COUNTS))
    if scale is Scale.PERCENT:
        return StartingValues(LevelParameters(*_PERCENT))
    if scale is Scale.LOG:
        return StartingValues(LevelParameters(*(_WATER if family is Family.WATER else _METALS)))
    q, r, tau = _LINEAR
    return StartingValues(LevelParameters(q * span**2, r * span**2, tau * span))
