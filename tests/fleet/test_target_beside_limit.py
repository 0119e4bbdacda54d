"""A target never lies beyond its limit. That a target is the stricter of the two is the project's own design."""

from datetime import date
from types import SimpleNamespace
from typing import Any

import pytest

from fleet.figures import side_beyond
from fleet.models import Limit, Reservoir, Target
from fleet.refusals import RefusedError
from fleet.targets import set_figure
from tests.builders import NOON, area, fluid, limit, measurand, person, reservoir, site, target

DAY = date(2026, 6, 1)


def row(**more: Any) -> Any:
    return SimpleNamespace(**({"code": "", "low": None, "high": None, "basis": "absolute"} | more))


@pytest.mark.parametrize(
    ("aim", "line", "side"),
    [
        ({"code": "18/16/13"}, {"code": "20/18/15"}, None),
        ({"code": "20/18/15"}, {"code": "20/18/15"}, None),
        ({"code": "18/16/16"}, {"code": "20/18/15"}, "code"),
        ({"code": "21/16/13"}, {"code": "-/18/15"}, None),
        ({"code": "-/19/13"}, {"code": "20/18/15"}, "code"),
        ({"high": 200.0}, {"high": 300.0}, None),
        ({"high": 300.0}, {"high": 300.0}, None),
        ({"high": 301.0}, {"high": 300.0}, "high"),
        ({"low": 2.0}, {"low": 3.0}, "low"),
        ({"low": -5.0, "high": 5.0}, {"low": -10.0, "high": 10.0}, None),
        ({"low": -12.0, "high": 5.0}, {"low": -10.0, "high": 10.0}, "low"),
        ({"high": 50.0}, {"low": 60.0}, None),
        ({"high": 50.0}, {"high": 10.0, "basis": "percent"}, None),
    ],
)
def test_size_by_size_and_side_by_side(aim: dict[str, Any], line: dict[str, Any], side: str | None) -> None:
    assert side_beyond(row(**aim), row(**line)) == side


def made(model: type[Target] | type[Limit], code: str, **more: Any) -> Target | Limit:
    fixed = {"measurand": measurand("iso4406"), "code": code, "valid_from": DAY, "source": "test: plant decision"}
    scope = {"scope": "plant", "site": site()} if "scope" not in more and "reservoir" not in more else {}
    own = {"scope": "reservoir"} if "reservoir" in more else {}
    return model(**(fixed | scope | own | more))


def said(figure: Target | Limit) -> str:
    with pytest.raises(RefusedError) as refusal:
        set_figure(figure, person(), NOON)
    assert (refusal.value.code, refusal.value.field) == ("target_beyond_limit", "code")
    return refusal.value.sentence


@pytest.fixture
def tank() -> Reservoir:
    return reservoir()


@pytest.mark.django_db
def test_a_target_beyond_the_limit_is_refused_with_both_figures(tank: Reservoir) -> None:
    limit(tank, "20/18/15")
    assert "target 20/19/13 lies beyond the limit 20/18/15" in said(made(Target, "20/19/13", reservoir=tank))
    assert not Target.objects.exists()


@pytest.mark.django_db
def test_a_limit_tighter_than_the_target_is_refused_with_both_figures(tank: Reservoir) -> None:
    target(tank, "18/16/13")
    assert "limit 19/17/12 is tighter than the target 18/16/13" in said(made(Limit, "19/17/12", reservoir=tank))


@pytest.mark.django_db
@pytest.mark.parametrize(
    "scope",
    [
        {"scope": "plant"},
        {"scope": "class", "reservoir_class": "hydraulic"},
        {"scope": "fluid"},
    ],
)
def test_a_figure_of_one_reservoir_is_held_against_what_it_inherits(tank: Reservoir, scope: dict[str, Any]) -> None:
    if scope["scope"] == "fluid":
        scope = scope | {"fluid": fluid()}
    made(Limit, "17/15/12", site=site(), **scope).save()
    assert "17/15/12" in said(made(Target, "18/16/13", reservoir=tank))
    elsewhere = reservoir(area=area(at=site("Far works")))
    set_figure(made(Target, "18/16/13", reservoir=elsewhere), person(), NOON)


@pytest.mark.django_db
def test_the_nearest_figure_decides(tank: Reservoir) -> None:
    made(Limit, "17/15/12").save()
    limit(tank, "20/18/15")
    set_figure(made(Target, "18/16/13", reservoir=tank), person(), NOON)


@pytest.mark.django_db
def test_a_figure_of_a_class_meets_its_own_class_and_then_the_plant() -> None:
    gear = {"scope": "class", "site": site(), "reservoir_class": "gearbox"}
    made(Limit, "17/15/12").save()
    assert "17/15/12" in said(made(Target, "18/16/13", **gear))
    made(Limit, "20/18/15", **gear).save()
    set_figure(made(Target, "18/16/13", **gear), person(), NOON)


@pytest.mark.django_db
def test_a_limit_that_comes_later_does_not_bind_an_earlier_day(tank: Reservoir) -> None:
    limit(tank, "17/15/12", since=date(2026, 6, 2))
    set_figure(made(Target, "18/16/13", reservoir=tank), person(), NOON)
    assert Target.objects.count() == 1


@pytest.mark.django_db
def test_a_correction_is_held_to_the_same(tank: Reservoir) -> None:
    stands = target(tank, "18/16/13")
    limit(tank, "20/18/15")
    stands.code = "21/18/15"
    said(stands)
    stands.refresh_from_db()
    assert stands.code == "18/16/13"
