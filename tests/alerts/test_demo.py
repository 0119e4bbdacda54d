"""The invented mill in a database: what it shows, and what it never touches."""

from io import StringIO

import pytest
from django.core.management import CommandError, call_command
from django.test import Client

from alerts.models import Alert, Delivery
from fleet.models import Person, Reservoir, Standing
from tests import builders

pytestmark = pytest.mark.django_db


def said(*arguments: str) -> str:
    out = StringIO()
    call_command("demo", *arguments, stdout=out)
    return out.getvalue()


@pytest.fixture
def mill() -> None:
    builders.measurand("water")
    assert "Everything in it is made up" in said()


def words() -> dict[str, int]:
    found = Standing.objects.values_list("word", flat=True)
    return {word: list(found).count(word) for word in set(found)}


def test_it_looks_like_a_plant_and_mails_nobody_about_the_past(mill: None) -> None:
    assert Reservoir.objects.count() == 60
    assert words()["within_target"] in range(39, 49)
    assert words()["past_limit"] in range(3, 6)
    assert Alert.objects.filter(kind="past_limit", family="water").count() == 1
    assert Alert.objects.filter(kind="forecast").exists()
    assert not Delivery.objects.exists()


def test_the_board_and_every_reservoir_can_be_read_and_say_that_they_are_made_up(mill: None, client: Client) -> None:
    client.force_login(Person.objects.get(username="supervisor"))
    for tag in [None, *Reservoir.objects.values_list("tag", flat=True)]:
        page = client.get(f"/reservoirs/{tag}/" if tag else "/")
        assert page.status_code == 200
        assert "every figure are made up" in page.content.decode()


def test_its_logins_work_and_a_second_load_changes_nothing(mill: None, client: Client) -> None:
    logins = [line.split()[1:3] for line in said("--logins").splitlines()]
    assert [client.login(username=name, password=word) for name, word in logins] == [True] * 4
    assert "already" in said()
    assert said("--if-empty") == ""
    assert Reservoir.objects.count() == 60


def test_it_refuses_to_mix_with_a_plant_of_its_own() -> None:
    builders.reservoir()
    with pytest.raises(CommandError, match="never mixed with real data"):
        said()
    assert said("--if-empty") == ""
    assert Reservoir.objects.count() == 1
