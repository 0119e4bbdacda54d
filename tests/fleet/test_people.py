"""Who may log in and as what; somebody must always be left who can let others in."""

from threading import Barrier, Thread

import pytest
from django.db import connection

from fleet.models import Person, Role
from fleet.people import names_of_administrators, save_person
from fleet.refusals import RefusedError
from tests.builders import person


@pytest.mark.django_db
@pytest.mark.parametrize(("change", "field"), [({"role": Role.ENGINEER}, "role"), ({"is_active": False}, "is_active")])
def test_the_last_active_administrator_stays(change: dict[str, object], field: str) -> None:
    last = person(Role.ADMINISTRATOR)
    person(Role.ADMINISTRATOR, is_active=False)
    for name, value in change.items():
        setattr(last, name, value)
    with pytest.raises(RefusedError) as refusal:
        save_person(last)
    assert (refusal.value.code, refusal.value.field) == ("last_administrator", field)
    last.refresh_from_db()
    assert last.may_act_as(Role.ADMINISTRATOR)


@pytest.mark.django_db
def test_an_administrator_may_step_down_while_another_stays() -> None:
    person(Role.ADMINISTRATOR)
    second = person(Role.ADMINISTRATOR)
    second.role = Role.READER
    assert save_person(second).role == Role.READER


@pytest.mark.django_db
def test_people_can_be_added_before_there_is_an_administrator() -> None:
    assert save_person(Person(username="first", role=Role.READER)).pk is not None


@pytest.mark.django_db(transaction=True)
def test_of_two_last_administrators_who_step_down_at_once_one_stays() -> None:
    both = [person(Role.ADMINISTRATOR), person(Role.ADMINISTRATOR)]
    start, refused = Barrier(2), []

    def step_down(who: Person) -> None:
        who.role = Role.READER
        start.wait()
        try:
            save_person(who)
        except RefusedError as refusal:
            refused.append(refusal.code)
        connection.close()

    together(step_down, both)
    assert refused == ["last_administrator"]
    assert Person.objects.filter(role=Role.ADMINISTRATOR).count() == 1


def together(work: object, people: list[Person]) -> None:
    threads = [Thread(target=work, args=[who]) for who in people]  # type: ignore[arg-type]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()


@pytest.mark.django_db
def test_only_active_administrators_are_named_to_ask() -> None:
    person(Role.ADMINISTRATOR, first_name="Ada", last_name="Quill")
    person(Role.ADMINISTRATOR, first_name="Gone", is_active=False)
    person(Role.ENGINEER)
    assert names_of_administrators() == ["Ada Quill"]
