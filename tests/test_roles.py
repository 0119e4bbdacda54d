"""No role can do more than it may: every address of the site, with the least role it needs.

An address that is missing here fails the first test: say who may open it.
"""

from collections.abc import Iterator
from typing import Any

import pytest
from django.test import Client
from django.urls import URLPattern, URLResolver, get_resolver, reverse

from fleet.models import Person, Role
from tests import builders

READER, TECHNICIAN, ENGINEER, ADMINISTRATOR = Role
ANYBODY = None

# Each noun of the register with its list: who may read, who may add and edit, who may remove (None: nobody can).
NOUN_ROLES: list[tuple[str, str, Role, Role, Role | None]] = [
    ("site", "sites", READER, ADMINISTRATOR, ADMINISTRATOR),
    ("area", "areas", READER, ENGINEER, ENGINEER),
    ("machine", "machines", READER, ENGINEER, ENGINEER),
    ("reservoir", "reservoirs", READER, ENGINEER, ENGINEER),
    ("point", "sample-points", READER, ENGINEER, ENGINEER),
    ("alias", "other-names", READER, ENGINEER, ENGINEER),
    ("fluid", "fluids", READER, ENGINEER, ENGINEER),
    ("charge", "oil-charges", READER, ENGINEER, None),
    ("event", "events", READER, TECHNICIAN, ENGINEER),
    ("position", "filter-positions", READER, ENGINEER, ENGINEER),
    ("element", "elements", READER, TECHNICIAN, ENGINEER),
    ("target", "targets", READER, ENGINEER, ENGINEER),
    ("limit", "limits", READER, ENGINEER, ENGINEER),
    ("laboratory", "laboratories", READER, ENGINEER, ENGINEER),
    ("person", "people", ADMINISTRATOR, ADMINISTRATOR, None),
]


def _noun_addresses() -> Iterator[tuple[str, Role]]:
    for key, many, read, write, remove in NOUN_ROLES:
        yield f"register-{many}", read
        yield f"register-{key}", read
        yield f"register-{key}-add", write
        yield f"register-{key}-edit", write
        if remove is not None:
            yield f"register-{key}-remove", remove


LEAST_ROLE: dict[str, Role | None] = {
    "healthz": ANYBODY,
    "login": ANYBODY,
    "logout": READER,
    "board": READER,
    "reservoir": READER,
    "account": READER,
    "account-password": READER,
    "register": READER,
    "register-person-password": ADMINISTRATOR,
    **dict(_noun_addresses()),
    "log": TECHNICIAN,
    "log-find": TECHNICIAN,
    "log-preview": TECHNICIAN,
    "samples": READER,
    "sample": READER,
    "sample-judge": ENGINEER,
    "upload": TECHNICIAN,
    "alerts": READER,
    "alert": READER,
    "alert-acknowledge": TECHNICIAN,
    "alert-close": ENGINEER,
    "rules": READER,
    "mail-choice-add": READER,
    "mail-choice-remove": READER,
}
# These answer a form that is sent, and nothing else.
POST_ONLY = {
    *("logout", "log-preview", "sample-judge", "alert-acknowledge", "alert-close"),
    *("mail-choice-add", "mail-choice-remove"),
}
# A page that a lesser role may read than may send its form.
SEND_ROLE: dict[str, Role | None] = LEAST_ROLE | {"rules": ENGINEER}
# Rows that no builder makes here: an address may say "not found", but never to a role that may not ask.
NOT_MADE = ("alert", "alert-acknowledge", "alert-close", "mail-choice-remove", "sample", "sample-judge")


def rows() -> dict[str, Any]:
    """One row of everything that an address can be about."""
    tank = builders.reservoir()
    position = builders.filter_position(tank)
    return {
        "site": tank.area.site,
        "area": tank.area,
        "machine": tank.machine,
        "reservoir": tank,
        "point": tank.points.get(),
        "alias": builders.alias(tank),
        "fluid": builders.fluid(),
        "charge": tank.charges.get(),
        "event": builders.event(tank),
        "position": position,
        "element": builders.element(position),
        "target": builders.target(tank, "18/16/13"),
        "limit": builders.limit(tank, "20/18/15"),
        "laboratory": builders.laboratory(),
        "person": builders.person(Role.ADMINISTRATOR),
    }


def names() -> Iterator[str]:
    def walk(patterns: list[Any]) -> Iterator[str]:
        for pattern in patterns:
            if isinstance(pattern, URLResolver):
                yield from walk(pattern.url_patterns)
            elif isinstance(pattern, URLPattern):
                yield str(pattern.name)

    yield from walk(get_resolver().url_patterns)


def test_every_address_says_who_may_open_it() -> None:
    assert sorted(set(names()) - set(LEAST_ROLE)) == []


def address(name: str, made: dict[str, Any]) -> str:
    noun = name.removeprefix("register-").removesuffix("-edit").removesuffix("-remove").removesuffix("-password")
    if name == "reservoir":
        return reverse(name, args=[made["reservoir"].tag])
    if name.startswith("register-") and noun in made:
        return reverse(name, args=[made[noun].pk])
    return reverse(name, args=[0] if name in NOT_MADE else [])


def log_in(client: Client, role: Role) -> Person:
    who = builders.person(role)
    client.force_login(who)
    return who


@pytest.mark.django_db
@pytest.mark.parametrize("name", sorted(name for name, role in LEAST_ROLE.items() if role is not ANYBODY))
def test_nobody_gets_in_without_a_login(client: Client, name: str) -> None:
    answer = client.get(address(name, rows()))
    assert answer.status_code == 302
    assert answer.headers["Location"].startswith(reverse("login"))


@pytest.mark.django_db
@pytest.mark.parametrize("role", Role)
@pytest.mark.parametrize("name", sorted(set(LEAST_ROLE) - POST_ONLY))
def test_a_role_opens_what_it_may_and_nothing_more(client: Client, name: str, role: Role) -> None:
    least = LEAST_ROLE[name]
    log_in(client, role)
    answer = client.get(address(name, rows()))
    if least is not ANYBODY and role.rank < least.rank:
        assert answer.status_code == 403
    else:
        assert answer.status_code in {200, 302, 404}


TOO_LITTLE = [(name, role) for name, least in SEND_ROLE.items() for role in Role if least and role.rank < least.rank]


@pytest.mark.django_db
@pytest.mark.parametrize(("name", "role"), TOO_LITTLE)
def test_a_role_that_may_not_open_a_form_cannot_send_it_either(client: Client, name: str, role: Role) -> None:
    log_in(client, role)
    assert client.post(address(name, rows())).status_code in {403, 405}


@pytest.mark.django_db
def test_the_refusal_says_what_is_missing_and_whom_to_ask(client: Client) -> None:
    builders.person(Role.ADMINISTRATOR, first_name="Ada", last_name="Quill")
    log_in(client, Role.READER)
    page = client.get(reverse("register-reservoir-add")).content.decode()
    assert "This needs the role engineer; yours is reader. To get it, ask Ada Quill." in page


@pytest.mark.django_db
@pytest.mark.parametrize("role", Role)
def test_an_inactive_person_may_nothing(role: Role) -> None:
    assert not builders.person(role, is_active=False).may_act_as(Role.READER)


@pytest.mark.django_db
@pytest.mark.parametrize(
    ("role", "offered", "withheld"),
    [
        (READER, "Its history", "Log an event"),
        (TECHNICIAN, "Log an event", "Set a target"),
        (ENGINEER, "Set a target", "nothing"),
    ],
)
def test_a_page_offers_only_what_the_role_may_do(client: Client, role: Role, offered: str, withheld: str) -> None:
    made = rows()
    log_in(client, role)
    page = client.get(address("register-reservoir", made)).content.decode()
    assert offered in page
    assert withheld not in page
