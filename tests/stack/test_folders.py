"""Folders and addresses: private, short enough, and free."""

import socket
import stat
import subprocess
import sys
import tempfile
from pathlib import Path

import pytest

from config.stack import addresses, folders
from config.stack.errors import StackError
from config.stack.folders import CHECKOUT, Lock


def free_port() -> int:
    with socket.create_server(("127.0.0.1", 0)) as probe:
        port: int = probe.getsockname()[1]
        return port


def test_the_secret_key_is_made_once_and_only_its_owner_reads_it(tmp_path: Path) -> None:
    key = folders.secret_key(tmp_path)
    assert len(key) >= 64
    assert folders.secret_key(tmp_path) == key
    assert stat.S_IMODE((tmp_path / "secret_key").stat().st_mode) == 0o600


@pytest.fixture
def shallow(tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The system's temporary folder for the test, whose own path does not grow with the test's name."""
    folder = tmp_path_factory.mktemp("t")
    monkeypatch.setattr(tempfile, "tempdir", str(folder))
    return folder


@pytest.mark.usefixtures("shallow")
def test_a_socket_folder_too_deep_gives_a_short_private_one(tmp_path: Path) -> None:
    short = folders.socket_folder(tmp_path / ("deep" * 30))
    assert len(str(short)) <= folders.SOCKET_PATH_LIMIT - folders.SOCKET_NAME_ROOM
    assert stat.S_IMODE(short.stat().st_mode) == 0o700
    assert folders.socket_folder(tmp_path / ("deep" * 30)) == short


@pytest.mark.usefixtures("shallow")
def test_a_short_folder_that_others_can_enter_is_refused(tmp_path: Path) -> None:
    folders.socket_folder(tmp_path / ("deep" * 30)).chmod(0o777)
    with pytest.raises(StackError, match="belongs to someone else"):
        folders.socket_folder(tmp_path / ("deep" * 30))


def test_a_second_supervisor_is_told_who_runs(tmp_path: Path) -> None:
    lock = Lock.take(tmp_path)
    lock.note("process 7, http://localhost:8000")
    with pytest.raises(StackError, match="process 7, http://localhost:8000"):
        Lock.take(tmp_path)
    assert Lock.held(tmp_path)


def test_a_lock_ends_with_its_holder(tmp_path: Path) -> None:
    code = f"from config.stack.folders import *; kept = Lock.take(Path({str(tmp_path)!r})); os._exit(9)"
    assert subprocess.run([sys.executable, "-c", code], cwd=CHECKOUT, check=False).returncode == 9
    assert not Lock.held(tmp_path)


def test_two_who_want_one_port_get_two_before_either_serves() -> None:
    first_port = free_port()
    with addresses.listen(first_port, "127.0.0.1") as one, addresses.listen(first_port, "127.0.0.1") as other:
        assert first_port <= one.getsockname()[1] < other.getsockname()[1]


def test_an_address_of_another_machine_is_named() -> None:
    with pytest.raises(StackError, match=r"192\.0\.2\.1"):  # RFC 5737, TEST-NET-1
        addresses.listen(8000, "192.0.2.1")


@pytest.mark.parametrize("text", ["eighty", "0", "70000", "-1"])
def test_a_port_that_is_none_is_named(monkeypatch: pytest.MonkeyPatch, text: str) -> None:
    monkeypatch.setenv("SILTWATCH_PORT", text)
    with pytest.raises(StackError, match="SILTWATCH_PORT"):
        addresses.wanted_port()


def test_nothing_answers_where_nobody_listens() -> None:
    assert addresses.health(free_port()) == 0
