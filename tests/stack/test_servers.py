"""The private database and broker: kept data, and what a kill leaves behind."""

import os
import stat
from collections.abc import Callable
from pathlib import Path

import psycopg
import pytest
import redis

from config.stack.broker import Broker, start_broker
from config.stack.children import Program
from config.stack.database import Database, kept_database, start_database
from config.stack.errors import StackError
from config.stack.supervisor import Supervisor
from tests.stack.processes import wait_until_gone
from tests.stack.test_supervisor import quiet


@pytest.fixture
def database(place: Path) -> Database:
    return kept_database(place, place / "database.log")


def with_server(database: Database, do: Callable[["psycopg.Connection"], object]) -> object:
    with Supervisor(quiet) as supervisor:
        start_database(supervisor, database)
        with psycopg.connect(database.url, autocommit=True) as connection:
            return do(connection)


def write_a_row(connection: "psycopg.Connection") -> None:
    connection.execute("create table kept as select 42 as answer")


def read_the_row(connection: "psycopg.Connection") -> object:
    return connection.execute("select answer from kept").fetchone()


def test_a_second_start_finds_the_data_of_the_first(database: Database) -> None:
    with_server(database, write_a_row)
    assert with_server(database, read_the_row) == (42,)


def test_data_and_socket_are_closed_to_everyone_else(database: Database) -> None:
    with_server(database, write_a_row)
    for folder in (database.data, database.sockets):
        facts = folder.stat()
        assert stat.S_IMODE(facts.st_mode) == 0o700
        assert facts.st_uid == (database.account.uid if database.account else os.geteuid())


def test_a_lock_that_names_a_living_stranger_is_forgotten(database: Database) -> None:
    with_server(database, write_a_row)
    stranger = Program("a stranger", ("sleep", "600"), {"PATH": "/usr/bin:/bin"}, Path("/"), account=database.account)
    with Supervisor(quiet) as supervisor:
        pid = supervisor.start(stranger).pid
        (database.data / "postmaster.pid").write_text(f"{pid}\n{database.data}\n")
        (database.sockets / ".s.PGSQL.5432.lock").write_text(f"{pid}\n")
        assert with_server(database, read_the_row) == (42,)


def test_a_server_that_outlived_its_supervisor_is_stopped_first(database: Database) -> None:
    with_server(database, write_a_row)
    with Supervisor(quiet) as lost:
        start_database(lost, database)
        orphan = lost.places[0].child
        assert orphan is not None
        assert with_server(database, read_the_row) == (42,)
        wait_until_gone([orphan.pid])


def test_data_of_another_version_are_left_alone(database: Database) -> None:
    with_server(database, write_a_row)
    (database.data / "PG_VERSION").write_text("12\n")
    with pytest.raises(StackError, match="written by PostgreSQL 12"):
        with_server(database, read_the_row)


@pytest.mark.parametrize(("keeps", "found"), [(True, b"42"), (False, None)])
def test_a_broker_keeps_messages_only_when_asked(tmp_path: Path, keeps: bool, found: bytes | None) -> None:
    broker = Broker(tmp_path / "broker", tmp_path / "broker.log", keeps=keeps)
    with Supervisor(quiet) as supervisor:
        start_broker(supervisor, broker)
        redis.Redis.from_url(broker.url).set("answer", 42)
    with Supervisor(quiet) as supervisor:
        start_broker(supervisor, broker)
        assert redis.Redis.from_url(broker.url).get("answer") == found
