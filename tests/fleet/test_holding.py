"""Two people at one reservoir: whoever logs an event must not stand in the way of whoever saves a sample."""

import psycopg
import pytest
from django.db import connection, transaction

from fleet import events
from tests import builders

pytestmark = pytest.mark.usefixtures("committed_rows")


def test_a_reservoir_held_for_an_event_can_still_be_referred_to() -> None:
    """A new sample or outlook asks for a key-share lock on its reservoir: waiting for it would end in a deadlock."""
    tank = builders.reservoir()
    parameters = {name: connection.settings_dict[name] for name in ("HOST", "PORT", "USER", "NAME")}
    place = psycopg.connect(
        host=parameters["HOST"], port=parameters["PORT"], user=parameters["USER"], dbname=parameters["NAME"]
    )
    with transaction.atomic(), place as other:
        events._hold(tank.pk)
        other.execute("SET lock_timeout = '500ms'")
        found = other.execute("SELECT id FROM fleet_reservoir WHERE id = %s FOR KEY SHARE", [tank.pk]).fetchone()
    assert found == (tank.pk,)
