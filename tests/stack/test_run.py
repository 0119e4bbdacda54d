"""`python -m config.stack run` as a whole, without the demo and with static files left where they lie."""

import http.client
import json
import os
import shutil
import signal
import smtplib
import socket
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import pytest

from config.stack import database
from config.stack.addresses import health
from config.stack.folders import CHECKOUT, digest
from tests.stack.processes import command_line, descendants, processes, wait_for, wait_until_gone

STACK = (sys.executable, "-m", "config.stack")
OURS = ("DATABASE_URL", "REDIS_URL", "SILTWATCH_SMTP_HOST", "SILTWATCH_STATIC_ROOT", "SILTWATCH_SECRET_KEY")


@dataclass
class Running:
    process: "subprocess.Popen[bytes]"
    state: Path
    wanted_port: int
    log: Path

    def said(self) -> str:
        return self.log.read_text()

    def facts(self) -> dict[str, str]:
        facts: dict[str, str] = json.loads((self.state / "environment.json").read_text())
        return facts

    @property
    def port(self) -> int:
        return int(self.facts()["SILTWATCH_URL"].rpartition(":")[2])


def environment(state: Path) -> dict[str, str]:
    """The tests' own servers are not the ones that are tried here."""
    kept = {name: value for name, value in os.environ.items() if name not in OURS}
    return kept | {"SILTWATCH_STATE": str(state), "SILTWATCH_DEBUG": "1", "SILTWATCH_DEMO": "0", "SILTWATCH_URL": ""}


@pytest.fixture(scope="module")
def state(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Path]:
    """One state folder for all starts: each after the first meets the data, and the remains, of the one before."""
    folder = tmp_path_factory.mktemp("run") / "state"
    yield folder
    shutil.rmtree(database.SHARED_ROOT / f"siltwatch-{digest(folder)}", ignore_errors=True)


@pytest.fixture
def running(state: Path, tmp_path: Path) -> Iterator[Running]:
    """A Siltwatch whose wanted port is taken, ready to serve."""
    log = tmp_path / "said"
    with socket.create_server(("127.0.0.1", 0)) as taken, log.open("wb") as out:
        port = taken.getsockname()[1]
        env = environment(state) | {"SILTWATCH_PORT": str(port)}
        process = subprocess.Popen([*STACK, "run"], cwd=CHECKOUT, env=env, stdout=out, stderr=out)
        try:
            wait_for(lambda: "Stop with Ctrl-C" in log.read_text() or process.poll() is not None, 60.0, "readiness")
            yield Running(process, state, port, log)
        finally:
            process.terminate()
            process.wait()


def manage(running: Running, *words: str) -> "subprocess.CompletedProcess[str]":
    env = environment(running.state)
    return subprocess.run(
        [*STACK, "manage", *words], cwd=CHECKOUT, env=env, capture_output=True, text=True, check=False
    )


def test_it_serves_on_the_next_free_port_and_a_kill_leaves_nothing(running: Running) -> None:
    assert running.port > running.wanted_port, running.said()
    assert health(running.port) == http.client.OK
    assert manage(running, "check").returncode == 0
    everyone = descendants(running.process.pid)
    assert len(everyone) >= 9  # database and its own, broker, web and 2, worker and 2, beat, mail catcher
    running.process.kill()
    wait_until_gone(everyone)
    assert "Siltwatch is not running" in manage(running, "check").stderr


def test_an_empty_plant_says_how_the_first_person_is_added_until_there_is_one(running: Running) -> None:
    line = ".venv/bin/python -m config.stack manage add_person NAME --role administrator"
    assert line in running.said()
    os.environ["FIRST_PASSWORD"] = "a long enough word"
    assert manage(running, "count_people").stdout == "0\n"
    added = manage(running, "add_person", "ada", "--role", "administrator", "--password-from", "FIRST_PASSWORD")
    assert added.returncode == 0, added.stderr
    assert manage(running, "count_people").stdout == "1\n"


def test_mails_become_files_also_after_the_catcher_was_killed(running: Running) -> None:
    facts = running.facts()
    catcher = next(pid for pid in descendants(running.process.pid) if "mailbox" in command_line(pid))
    os.kill(catcher, signal.SIGKILL)
    with smtplib.SMTP("127.0.0.1", int(facts["SILTWATCH_SMTP_PORT"]), timeout=30) as client:
        client.sendmail("mill@example.com", ["ada@example.com"], "Subject: Debarker 2\r\n\r\nPast its limit.\r\n")
    assert "Subject: Debarker 2" in next((running.state / "mail").glob("*.eml")).read_text()
    assert "the mail catcher ended with exit code -9; starting it again" in running.said()


def test_a_wanted_stop_is_clean_and_a_second_start_is_refused_meanwhile(running: Running) -> None:
    env = environment(running.state)
    second = subprocess.run([*STACK, "run"], cwd=CHECKOUT, env=env, capture_output=True, text=True, check=False)
    assert (second.returncode, second.stderr.startswith("Siltwatch already runs from")) == (1, True)
    everyone = descendants(running.process.pid)
    running.process.send_signal(signal.SIGTERM)
    assert running.process.wait(60) == 0, running.said()
    assert running.said().endswith("Siltwatch has stopped.\n")
    assert not everyone & processes().keys()


def test_exec_runs_a_command_beside_servers_of_its_own_and_hands_back_its_code(tmp_path: Path) -> None:
    code = "import os, sys; print(os.environ['DATABASE_URL'], os.environ['REDIS_URL']); sys.exit(5)"
    command = [*STACK, "exec", "--", sys.executable, "-c", code]
    done = subprocess.run(command, cwd=CHECKOUT, env=environment(tmp_path), capture_output=True, text=True, check=False)
    database_url, redis_url = done.stdout.split()
    assert done.returncode == 5
    assert database_url.startswith("postgres://siltwatch@%2F")
    assert redis_url.startswith("unix:///")
    assert not Path(redis_url.removeprefix("unix://").partition("?")[0]).exists()
