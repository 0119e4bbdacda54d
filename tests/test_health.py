"""The health page: open to anyone who can reach it, and honest about what does not answer."""

import pytest
from django.test import Client
from pytest_django import Settings


@pytest.mark.django_db
def test_it_is_well_when_database_and_broker_answer(client: Client) -> None:
    answer = client.get("/healthz/")
    assert (answer.status_code, answer.json()) == (200, {"database": "answers", "broker": "answers"})


@pytest.mark.django_db
def test_it_names_the_broker_when_that_does_not_answer(client: Client, settings: Settings) -> None:
    settings.REDIS_URL = "unix:///nowhere/broker.sock"
    answer = client.get("/healthz/")
    assert (answer.status_code, answer.json()["broker"]) == (503, "does not answer")
