"""The supervisor: order, restarts, giving up, and nothing left behind."""

import os
import signal
import socket
import subprocess
import sys
import textwrap
from collections.abc import Callable
from pathlib import Path

import pytest

from config.stack import supervisor as supervisor_module
from config.stack.accounts import Account, database_account
from config.stack.children import Program
from config.stack.errors import StackError
from config.stack.folders import CHECKOUT
from config.stack.leash import ON_LINUX
from config.stack.supervisor import Supervisor
from tests.stack.processes import processes, wait_for, wait_until_gone

Builder = Callable[..., Program]
SAYS_GOODBYE = """
import pathlib, signal, sys, time
def leave(*_):
    with open("order", "a") as order: order.write("{name} ")
    sys.exit()
signal.signal(signal.SIGTERM, leave)
pathlib.Path("{name}.up").touch()
time.sleep(600)
"""


@pytest.fixture
def hurried(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(supervisor_module, "LONGEST_PAUSE", 0.01)
    monkeypatch.setattr(supervisor_module, "TICK", 0.01)


def quiet(line: str) -> None:
    """Nobody listens."""


def test_children_stop_in_the_reverse_of_their_start(python: Builder, tmp_path: Path) -> None:
    with Supervisor(quiet) as supervisor:
        for name in ("first", "second", "third"):
            supervisor.start(python(name, SAYS_GOODBYE.format(name=name)))
        wait_for(lambda: len(list(tmp_path.glob("*.up"))) == 3)
    assert (tmp_path / "order").read_text().split() == ["third", "second", "first"]


def test_a_deaf_child_is_ended_after_its_patience(python: Builder, tmp_path: Path) -> None:
    deaf = (
        "import signal, pathlib, time; signal.signal(15, signal.SIG_IGN); pathlib.Path('up').touch(); time.sleep(600)"
    )
    with Supervisor(quiet) as supervisor:
        child = supervisor.start(python("deaf", deaf, stop_seconds=0.2))
        wait_for((tmp_path / "up").exists)
    assert child.ended() == -signal.SIGKILL


@pytest.mark.usefixtures("hurried")
def test_a_child_without_state_is_started_again(python: Builder, tmp_path: Path) -> None:
    code = "import time; f = open('lives', 'a+'); f.write('x'); f.seek(0); time.sleep(600 * (f.read() == 'xxx'))"
    said: list[str] = []
    (tmp_path / "lives").touch()
    with Supervisor(said.append) as supervisor:
        supervisor.start(python("the worker", code, restarts=True))
        look = supervisor_module.Supervisor._look_at
        wait_for(lambda: look(supervisor, supervisor.places[0]) or (tmp_path / "lives").read_text() == "xxx")
    assert len(said) == 2
    assert said[0].startswith("the worker ended with exit code 0; starting it again in ")


@pytest.mark.usefixtures("hurried")
def test_it_gives_up_after_five_quick_failures_and_quotes_the_last_words(python: Builder) -> None:
    with Supervisor(quiet) as supervisor:
        supervisor.start(python("the worker", "print('no such module'); raise SystemExit(3)", restarts=True))
        with pytest.raises(StackError, match=r"(?s)the worker failed 5 times in a row; giving up.*no such module"):
            supervisor.watch()


@pytest.mark.usefixtures("hurried")
def test_the_end_of_a_child_with_state_ends_the_rest(python: Builder) -> None:
    with Supervisor(quiet) as supervisor:
        other = supervisor.start(python("the worker"))
        supervisor.start(python("PostgreSQL", "raise SystemExit(7)"))
        with pytest.raises(StackError, match="PostgreSQL ended with exit code 7"):
            supervisor.watch()
    assert other.ended() is not None


def test_a_failed_step_says_why(python: Builder) -> None:
    with Supervisor(quiet) as supervisor, pytest.raises(StackError, match=r"(?s)migrate failed.*no such table"):
        supervisor.step(python("migrate", "import sys; sys.exit('no such table')"))


SUPERVISED = """
import pathlib, sys
from config.stack import supervisor
from config.stack.accounts import Account
from config.stack.children import Program
from config.stack.leash import Watcher
account = {account}
with supervisor.Supervisor(print) as s:
    {watcher}
    for number in range(2):
        program = Program("a", ("sleep", "600"), dict(PATH="/usr/bin:/bin"), pathlib.Path("/"), account=account)
        print(s.start(program).pid, flush=True)
    print("up", flush=True)
    s.watch()
"""


def kill_the_supervisor_of(code: str) -> list[int]:
    """Run it until it says "up", end it as an outage would, and return the numbers of its children."""
    with subprocess.Popen([sys.executable, "-c", code], cwd=CHECKOUT, stdout=subprocess.PIPE, text=True) as process:
        assert process.stdout is not None
        pids = [int(line) for line in iter(process.stdout.readline, "up\n")]
        assert pids, "no child was started"
        assert set(pids) <= processes().keys()
        process.kill()
    return pids


@pytest.mark.skipif(not ON_LINUX, reason="the kernel's death signal is Linux's")
def test_a_killed_supervisor_leaves_nothing_behind() -> None:
    wait_until_gone(kill_the_supervisor_of(textwrap.dedent(SUPERVISED).format(account=None, watcher="pass")))


@pytest.mark.skipif(os.geteuid() != 0, reason="only root can start a child under another account")
def test_nor_a_child_under_another_account() -> None:
    account = database_account()
    assert isinstance(account, Account)
    wait_until_gone(kill_the_supervisor_of(SUPERVISED.format(account=account, watcher="pass")))


def test_nor_where_the_kernel_gives_no_help() -> None:
    watcher = "supervisor.Child.__init__.__globals__['tie'] = lambda signal: None; s._watcher = Watcher()"
    wait_until_gone(kill_the_supervisor_of(SUPERVISED.format(account=None, watcher=watcher)))


@pytest.mark.usefixtures("hurried")
def test_what_is_only_an_extra_is_done_without(python: Builder) -> None:
    said: list[str] = []
    with Supervisor(said.append) as supervisor:
        listens = socket.create_server(("127.0.0.1", 0))
        failing = python("the mail catcher", "raise SystemExit(3)", restarts=True, is_extra=True, listens=listens)
        supervisor.start(failing)
        stays = supervisor.start(python("the database", "import time; time.sleep(600)"))
        look = supervisor_module.Supervisor._look_at
        wait_for(lambda: look(supervisor, supervisor.places[0]) or len(supervisor.places) == 1)
        assert stays.ended() is None
    assert "going on without it" in said[-1]
    assert listens.fileno() == -1, "callers would wait for an answer"
