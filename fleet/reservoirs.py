"""Registering and changing a reservoir with what belongs to it: its machine, its first oil, its sample point."""

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import datetime

from fleet.models import Area, Fluid, Machine, OilCharge, Reservoir, SamplePoint
from fleet.refresh import want_refresh
from fleet.refusals import refusing
from fleet.volumes import hold_volume


@dataclass(frozen=True, slots=True)
class FirstFilling:
    """What is in the reservoir when it is registered, since when, where its bottle is filled, and a machine to add."""

    fluid: Fluid
    filled_at: datetime
    point_name: str
    point_place: str = ""
    new_machine: str = ""


def register(reservoir: Reservoir, also_serves: Iterable[Machine], filling: FirstFilling, now: datetime) -> Reservoir:
    """A new reservoir with its oil charge and its planned sample point, so that a result can be logged at once."""
    with refusing():
        if filling.new_machine:
            reservoir.machine = _machine(reservoir.area, filling.new_machine)
        _save(reservoir, also_serves)
        SamplePoint.objects.create(
            reservoir=reservoir, name=filling.point_name, place=filling.point_place, is_default=True
        )
        OilCharge.objects.create(
            reservoir=reservoir, fluid=filling.fluid, started_at=filling.filled_at, volume_l=reservoir.volume_l
        )
        want_refresh([reservoir.pk], now)
    return reservoir


def change(reservoir: Reservoir, also_serves: Iterable[Machine], now: datetime) -> Reservoir:
    """Save a changed reservoir; its interval, class or volume may change where it stands."""
    with refusing():
        _save(reservoir, also_serves)
        want_refresh([reservoir.pk], now)
    return reservoir


def _save(reservoir: Reservoir, also_serves: Iterable[Machine]) -> None:
    reservoir.save()
    reservoir.also_serves.set(also_serves)


def _machine(area: Area, name: str) -> Machine:
    there = Machine.objects.filter(area=area, name__iexact=name).first()
    return there or Machine.objects.create(area=area, name=name)


def save_point(point: SamplePoint, now: datetime) -> SamplePoint:
    """Save a sample point. Made the planned one, it takes that over from the point that was."""
    with refusing():
        Reservoir.objects.select_for_update(no_key=True).get(pk=point.reservoir_id)
        if point.is_default:
            others = SamplePoint.objects.filter(reservoir=point.reservoir_id, is_default=True).exclude(pk=point.pk)
            others.update(is_default=False)
        point.save()
        want_refresh([point.reservoir_id], now)
    return point


def save_fluid(fluid: Fluid, now: datetime) -> Fluid:
    """Save an oil. Its new-oil figures are baselines: every reservoir that holds or held it is looked at afresh."""
    with refusing():
        fluid.save()
        want_refresh(Reservoir.objects.filter(charges__fluid=fluid).values_list("pk", flat=True), now)
    return fluid


def save_charge(charge: OilCharge, now: datetime) -> OilCharge:
    """Save a corrected filling."""
    with refusing():
        hold_volume(charge.reservoir, charge.volume_l, "volume_l")
        charge.save()
        want_refresh([charge.reservoir_id], now)
    return charge
