"""Setting targets and limits, and who is looked at afresh for it."""

from datetime import date
from typing import Any

import pytest

from fleet.models import Limit, Reservoir, Standing, Target
from fleet.refusals import RefusedError
from fleet.targets import in_force, reservoirs_in_scope, set_figure, withdraw
from tests.builders import NOON, area, fluid, limit, measurand, person, reservoir, site, target

pytestmark = pytest.mark.django_db
DAY = date(2026, 6, 1)


def wanted() -> set[int]:
    return set(Standing.objects.wanted().values_list("pk", flat=True))


def figure(**facts: Any) -> Target:
    fixed = {"measurand": measurand("iso4406"), "code": "18/16/13", "valid_from": DAY, "source": "maker's manual"}
    return Target(**(fixed | facts))


@pytest.fixture
def fleet() -> dict[str, Reservoir]:
    far = area(at=site("Far works"))
    return {
        "press": reservoir(machine="Press 1"),
        "gear": reservoir(machine="Mill 1", reservoir_class="gearbox", fluid=fluid("CLP 220")),
        "far": reservoir(machine="Press 9", area=far),
    }


@pytest.mark.parametrize(
    ("facts", "names"),
    [
        ({"scope": "plant"}, {"press", "gear"}),
        ({"scope": "class", "reservoir_class": "gearbox"}, {"gear"}),
        ({"scope": "fluid", "fluid": "HM 46"}, {"press"}),
    ],
)
def test_all_reservoirs_in_its_scope_are_looked_at_afresh(
    fleet: dict[str, Reservoir], facts: dict[str, Any], names: set[str]
) -> None:
    if "fluid" in facts:
        facts = facts | {"fluid": fluid(facts["fluid"])}
    set_figure(figure(site=site(), **facts), person(), NOON)
    assert wanted() == {fleet[name].pk for name in names}


def test_a_figure_of_one_reservoir_touches_only_that_one(fleet: dict[str, Reservoir]) -> None:
    set_figure(figure(scope="reservoir", reservoir=fleet["far"]), person(), NOON)
    assert wanted() == {fleet["far"].pk}


def test_a_figure_moved_to_another_scope_touches_both(fleet: dict[str, Reservoir]) -> None:
    stands = target(fleet["far"], "18/16/13")
    stands.reservoir = fleet["gear"]
    set_figure(stands, person(), NOON)
    assert wanted() == {fleet["far"].pk, fleet["gear"].pk}


def test_a_new_figure_leaves_the_old_one_on_record(fleet: dict[str, Reservoir]) -> None:
    old = target(fleet["press"], "19/17/14")
    who = person()
    new = set_figure(figure(scope="reservoir", reservoir=fleet["press"]), who, NOON)
    assert set(Target.objects.all()) == {old, new}
    assert new.author == who


def test_the_same_figure_twice_a_day_is_refused(fleet: dict[str, Reservoir]) -> None:
    target(fleet["press"], "19/17/14", since=DAY)
    with pytest.raises(RefusedError) as refusal:
        set_figure(figure(scope="reservoir", reservoir=fleet["press"]), person(), NOON)
    assert (refusal.value.code, refusal.value.field) == ("target_once_a_day", "valid_from")


def test_withdrawing_a_figure_touches_its_reservoirs(fleet: dict[str, Reservoir]) -> None:
    withdraw(limit(fleet["press"], "21/19/16"), NOON)
    assert wanted() == {fleet["press"].pk}
    assert not Limit.objects.exists()


def test_a_figure_for_an_oil_concerns_who_ever_held_it(fleet: dict[str, Reservoir]) -> None:
    fleet["press"].charges.update(ended_at=NOON)
    found = reservoirs_in_scope(figure(scope="fluid", site=site(), fluid=fluid()))
    assert found == {fleet["press"].pk}


def test_what_is_in_force_is_resolved_for_target_and_limit_apart(fleet: dict[str, Reservoir]) -> None:
    figure(scope="plant", site=site(), code="20/18/15", valid_from=date(2020, 1, 1)).save()
    target(fleet["press"], "18/16/13")
    limit(fleet["press"], key="water", high=300)
    lines = [(line.measurand.key, line.target, line.limit) for line in in_force(fleet["press"], DAY, NOON)]
    told = [(key, aim and aim.text, stop and stop.text) for key, aim, stop in lines]
    assert told == [("iso4406", "18/16/13", None), ("water", None, "at most 300 mg/kg")]
