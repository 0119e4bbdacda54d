"""Plain builders with readable defaults: what a test does not name, it does not care about. Nothing here is random."""

from datetime import UTC, date, datetime, timedelta
from functools import cache
from itertools import count
from typing import Any

from django.contrib.auth.hashers import make_password

from fleet import catalogue
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
    Person,
    Reservoir,
    ReservoirAlias,
    Role,
    SamplePoint,
    Site,
    Target,
)
from samples.models import Laboratory, Result, Sample

NOON = datetime(2026, 6, 1, 12, tzinfo=UTC)
PASSWORD = "a long enough word"
_number = count(1)
# Hashing is slow on purpose; once is enough for everybody.
_hashed = cache(make_password)


def days_ago(days: float, as_of: datetime = NOON) -> datetime:
    return as_of - timedelta(days=days)


def person(role: Role = Role.TECHNICIAN, **more: Any) -> Person:
    name = more.pop("username", f"{role}{next(_number)}")
    made = Person(username=name, role=role, email=more.pop("email", f"{name}@plant.example"), **more)
    made.password = _hashed(PASSWORD)
    made.save()
    return made


def site(name: str = "Test works", **more: Any) -> Site:
    return Site.objects.get_or_create(name=name, defaults={"time_zone": "UTC", **more})[0]


def area(name: str = "Press hall", at: Site | None = None) -> Area:
    return Area.objects.get_or_create(site=at or site(), name=name)[0]


def fluid(name: str = "HM 46", **more: Any) -> Fluid:
    facts = {
        "viscosity_grade": 46,
        "viscosity_40": 46.0,
        "viscosity_100": 6.8,
        "density_kg_l": 0.87,
        "acid_number": 0.3,
    }
    return Fluid.objects.get_or_create(name=name, defaults=facts | more)[0]


def reservoir(name: str = "drive pack", machine: str = "Press 4", **more: Any) -> Reservoir:
    """A reservoir with one sample point SP-1 and an oil charge begun three years before NOON."""
    place = more.pop("area", None) or area()
    oil = more.pop("fluid", None) or fluid()
    facts = {"tag": f"T-{next(_number):04d}", "reservoir_class": "hydraulic", "volume_l": 400.0, "interval_days": 60}
    owner = Machine.objects.get_or_create(area=place, name=machine)[0]
    made = Reservoir.objects.create(area=place, machine=owner, name=name, **(facts | more))
    SamplePoint.objects.create(reservoir=made, name="SP-1", place="return line, live valve", is_default=True)
    OilCharge.objects.create(reservoir=made, fluid=oil, started_at=days_ago(1095), volume_l=made.volume_l)
    return made


def event(of: Reservoir, kind: str = Event.Kind.TOP_UP, at: datetime = NOON, **more: Any) -> Event:
    return Event.objects.create(reservoir=of, kind=kind, at=at, **more)


def alias(of: Reservoir, name: str = "HYD UNIT 4", **more: Any) -> ReservoirAlias:
    return ReservoirAlias.objects.create(reservoir=of, name=name, **more)


def filter_position(of: Reservoir, name: str = "R1", place: str = FilterPosition.Place.RETURN) -> FilterPosition:
    return FilterPosition.objects.create(reservoir=of, name=name, place=place, flow_l_min=120.0)


def element(at: FilterPosition, fitted_on: date = date(2025, 1, 1), **more: Any) -> Element:
    facts = {"part": "EL-5", "rating_kind": "beta", "beta": 1000.0, "beta_size_um": 5.0}
    return Element.objects.create(position=at, fitted_on=fitted_on, **(facts | more))


def laboratory(name: str = "Bench counter", **more: Any) -> Laboratory:
    return Laboratory.objects.get_or_create(name=name, defaults=more)[0]


def measurand(key: str) -> Measurand:
    """A measurand of the shipped catalogue, also after a test has emptied the tables."""
    if not Measurand.objects.filter(key=key).exists():
        catalogue.load(Measurand)
    return Measurand.objects.get(key=key)


def target(of: Reservoir, code: str = "", key: str = "iso4406", since: date = date(2020, 1, 1), **more: Any) -> Target:
    return Target.objects.create(**_figure(of, code, key, since), **more)


def limit(of: Reservoir, code: str = "", key: str = "iso4406", since: date = date(2020, 1, 1), **more: Any) -> Limit:
    return Limit.objects.create(**_figure(of, code, key, since), **more)


def _figure(of: Reservoir, code: str, key: str, since: date) -> dict[str, Any]:
    return {
        "scope": "reservoir",
        "reservoir": of,
        "measurand": measurand(key),
        "code": code,
        "valid_from": since,
        "source": "test: plant decision",
    }


def sample(of: Reservoir, drawn_at: datetime = NOON, values: dict[str, float] | None = None, **more: Any) -> Sample:
    """An accepted sample with point values by measurand key, particles per mL."""
    point = more.pop("point", None) or of.points.get(is_default=True)
    made = Sample.objects.create(
        reservoir=of,
        point=point,
        charge=of.charge_on(drawn_at),
        drawn_at=drawn_at,
        entered_at=more.pop("entered_at", drawn_at),
        laboratory=more.pop("laboratory", None) or laboratory(),
        **more,
    )
    for key, value in (values or {}).items():
        result(made, key, value)
    return made


def result(of: Sample, key: str, value: float | None = None, **more: Any) -> Result:
    known = measurand(key)
    facts = {
        "reported_text": more.pop("text", f"{value:g}" if value is not None else "code"),
        "reported_unit": known.unit,
        "size_scale": "um_c" if known.kind == "count" else "",
        "entered_at": of.entered_at,
    }
    return Result.objects.create(sample=of, measurand=known, value=value, **(facts | more))
