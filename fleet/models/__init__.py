"""The register: one module a noun."""

from fleet.models.filters import Element, FilterPosition
from fleet.models.measurands import Measurand
from fleet.models.oil import Event, Fluid, OilCharge
from fleet.models.people import Person, Role
from fleet.models.places import Area, Machine, Site
from fleet.models.reservoirs import Reservoir, ReservoirAlias, ReservoirClass, SamplePoint
from fleet.models.standing import RunwayState, Standing, StandingWord
from fleet.models.targets import Limit, Scope, Target

__all__ = [
    "Area",
    "Element",
    "Event",
    "FilterPosition",
    "Fluid",
    "Limit",
    "Machine",
    "Measurand",
    "OilCharge",
    "Person",
    "Reservoir",
    "ReservoirAlias",
    "ReservoirClass",
    "Role",
    "RunwayState",
    "SamplePoint",
    "Scope",
    "Site",
    "Standing",
    "StandingWord",
    "Target",
]
