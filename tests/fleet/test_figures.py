"""Choosing the figure of the day. The order plant, class, fluid, reservoir is the project's own design."""

from dataclasses import dataclass, field
from datetime import date
from itertools import permutations
from types import SimpleNamespace

import pytest

from fleet.figures import figure_for
from fleet.models import Limit, Scope, Target

DAY = date(2026, 6, 1)
HM46, HM32 = 1, 2


@dataclass
class Row:
    """A figure without a table behind it."""

    scope: str
    valid_from: date = date(2020, 1, 1)
    fluid_id: int | None = None
    measurand: SimpleNamespace = field(default_factory=lambda: SimpleNamespace(key="water"))


def chosen(*rows: Row, day: date = DAY, fluid_id: int | None = HM46) -> Row | None:
    return figure_for(rows, "water", day, fluid_id)


@pytest.mark.parametrize("missing", range(4))
def test_the_nearest_scope_wins_in_whatever_order_the_rows_come(missing: int) -> None:
    nearest_first = [Row("reservoir"), Row("fluid", fluid_id=HM46), Row("class"), Row("plant")][missing:]
    for rows in permutations(nearest_first):
        assert chosen(*rows) is nearest_first[0]


def test_within_a_scope_the_newest_figure_of_the_day_wins() -> None:
    old, new, coming = (Row("plant", date(year, 1, 1)) for year in (2022, 2025, 2027))
    assert chosen(new, coming, old) is new


def test_a_figure_holds_from_its_own_day_on() -> None:
    only = Row("plant", DAY)
    assert chosen(only, day=DAY) is only
    assert chosen(only, day=date(2026, 5, 31)) is None


def test_an_old_figure_for_the_reservoir_beats_a_new_one_for_the_plant() -> None:
    own = Row("reservoir", date(2015, 1, 1))
    assert chosen(Row("plant", DAY), own) is own


def test_a_nearer_figure_that_is_not_valid_yet_leaves_the_farther_one() -> None:
    plant = Row("plant")
    assert chosen(Row("reservoir", date(2026, 6, 2)), plant) is plant


def test_a_figure_for_another_oil_never_applies() -> None:
    assert chosen(Row("fluid", fluid_id=HM32)) is None


def test_without_an_oil_on_record_no_fluid_figure_applies() -> None:
    plant = Row("plant")
    assert chosen(Row("fluid", fluid_id=None), Row("fluid", fluid_id=HM46), plant, fluid_id=None) is plant


def test_another_measurand_is_never_judged_by_it() -> None:
    assert figure_for([Row("plant")], "fe", DAY, HM46) is None


def test_it_takes_rows_of_both_tables() -> None:
    assert figure_for(list[Target](), "water", DAY, HM46) is None
    assert figure_for(list[Limit](), "water", DAY, HM46) is None


def test_every_scope_has_a_place_in_the_order() -> None:
    assert all(chosen(Row(scope, fluid_id=HM46)) is not None for scope in Scope.values)
