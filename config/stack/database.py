"""The private PostgreSQL: made once, reachable through one Unix socket, run under an account that may run it."""

import contextlib
import os
import shutil
import signal
import subprocess
import time
from dataclasses import dataclass, replace
from pathlib import Path
from urllib.parse import quote

from config.stack.accounts import Account, database_account
from config.stack.binaries import postgres_home, readable_copy
from config.stack.children import Child, Program
from config.stack.errors import StackError
from config.stack.folders import digest, private_folder, socket_folder
from config.stack.leash import ON_LINUX
from config.stack.supervisor import Supervisor

NAME = USER = "siltwatch"
PORT = "5432"  # only a part of the socket's name
ENVIRONMENT = {"PATH": "/usr/bin:/bin", "LANG": "C.UTF-8", "TZ": "UTC"}
READY_SECONDS = 60.0
ORPHAN_SECONDS = 20.0
# Tests and trials may lose everything with the machine; a plant's records may not.
THROWAWAY = ("fsync=off", "synchronous_commit=off", "full_page_writes=off")
SHARED_ROOT = Path("/var/lib")


@dataclass(frozen=True)
class Database:
    """Where the database lives. `data` is its own, 0700; `sockets` holds the one way in."""

    data: Path
    sockets: Path
    programs: Path
    log: Path
    account: Account | None
    options: tuple[str, ...] = ()

    @property
    def url(self) -> str:
        return f"postgres://{USER}@{quote(str(self.sockets), safe='')}:{PORT}/{NAME}"

    def program(self, name: str, *arguments: str) -> Program:
        """One of PostgreSQL's own programs, under the database's account and away from the operator's PG* settings."""
        argv = (str(self.programs / "bin" / name), *arguments)
        return Program(f"PostgreSQL's {name}", argv, ENVIRONMENT, Path("/"), self.log, account=self.account)

    def server(self) -> Program:
        options = (
            "listen_addresses=",
            f"unix_socket_directories={self.sockets}",
            "unix_socket_permissions=0700",
            *self.options,
        )
        arguments = [part for option in options for part in ("-c", option)]
        return replace(
            self.program("postgres", "-D", str(self.data), "-p", PORT, *arguments),
            name="PostgreSQL",
            stop_signal=signal.SIGINT,  # fast shutdown: sessions are cut, everything is written
            death_signal=signal.SIGINT,
            stop_seconds=60.0,
        )


def kept_database(state: Path, log: Path) -> Database:
    """The database of a state folder.

    As root it lives in a folder of its own under /var/lib, with a copy of the programs, so that neither the checkout
    nor anything above it has to be opened for the database's account.
    """
    account = database_account()
    if account is None:
        home = private_folder(state / "database")
        return Database(home / "data", socket_folder(home / "socket"), postgres_home(), log, None)
    return _root_database(private_folder(SHARED_ROOT / f"siltwatch-{digest(state)}", 0o755), log, account)


def throwaway_database(folder: Path, log: Path) -> Database:
    account = database_account()
    if account is None:
        return Database(folder / "data", socket_folder(folder / "socket"), postgres_home(), log, None, THROWAWAY)
    return _root_database(folder, log, account, THROWAWAY)


def _root_database(folder: Path, log: Path, account: Account, options: tuple[str, ...] = ()) -> Database:
    programs = readable_copy(private_folder(SHARED_ROOT / "siltwatch-programs", 0o755))
    home = private_folder(folder / "database", account=account)
    sockets = private_folder(folder / "socket", account=account)
    return Database(home / "data", sockets, programs, log, account, options)


def start_database(supervisor: Supervisor, database: Database) -> None:
    """Make it when new, clear what a killed one left behind, start it, and wait until it answers."""
    if (database.data / "PG_VERSION").exists():
        _check_version(database)
        _settle_remains(database)
    else:
        _make(supervisor, database)
    child = supervisor.start(database.server())
    _wait_ready(database, child)
    _ensure_database(database)


def _make(supervisor: Supervisor, database: Database) -> None:
    fresh = database.data.with_name("data.new")  # a start that is killed half-way leaves no half database behind
    shutil.rmtree(fresh, ignore_errors=True)
    arguments = ["-D", str(fresh), "--username", USER, "--auth-local=trust", "--auth-host=reject", "--encoding=UTF8"]
    arguments += ["--no-sync"] if database.options else []
    supervisor.step(database.program("initdb", *arguments, "--locale-provider=builtin", "--locale=C.UTF-8"))
    fresh.rename(database.data)


def _check_version(database: Database) -> None:
    written = (database.data / "PG_VERSION").read_text().strip()
    reported = _ask(database, "postgres", "--version").stdout.split()[-1].partition(".")[0]
    if written != reported:
        raise StackError(
            f"{database.data} was written by PostgreSQL {written}, and this is {reported}: dump it with the older "
            "version and load it again, or move the folder away to start afresh."
        )


def _settle_remains(database: Database) -> None:
    """Wait for, or end, a server that outlived its supervisor; forget lock files that name no server of ours."""
    lock = database.data / "postmaster.pid"
    deadline = time.monotonic() + ORPHAN_SECONDS
    while lock.exists() and (pid := _first_number(lock)) and _serves(pid, database.data):
        if time.monotonic() > deadline:
            raise StackError(
                f"A PostgreSQL (process {pid}) still uses {database.data} and does not stop: end it first."
            )
        with contextlib.suppress(ProcessLookupError):
            os.kill(pid, signal.SIGINT)
        time.sleep(0.2)
    lock.unlink(missing_ok=True)
    (database.sockets / f".s.PGSQL.{PORT}.lock").unlink(missing_ok=True)


def _first_number(lock: Path) -> int:
    with contextlib.suppress(FileNotFoundError, ValueError, IndexError):
        return int(lock.read_text().splitlines()[0])
    return 0


def _serves(pid: int, data: Path) -> bool:
    """Whether that process is a PostgreSQL on this data: after a restart its number may be anybody's."""
    command = _command(pid)
    return "postgres" in command and str(data) in command


def _command(pid: int) -> str:
    """The command line of a process, empty when there is none."""
    if not ON_LINUX:
        shown = subprocess.run(["ps", "-ww", "-o", "command=", "-p", str(pid)], capture_output=True, check=False)
        return os.fsdecode(shown.stdout)
    with contextlib.suppress(FileNotFoundError, ProcessLookupError):
        return os.fsdecode(Path(f"/proc/{pid}/cmdline").read_bytes())
    return ""


def _wait_ready(database: Database, child: Child) -> None:
    deadline = time.monotonic() + READY_SECONDS
    while _ask(database, "pg_isready", *_address(database)).returncode != 0:
        if child.ended() is not None:
            raise StackError(f"PostgreSQL did not start.{child.last_words()}")
        if time.monotonic() > deadline:
            raise StackError(f"PostgreSQL did not answer within {READY_SECONDS:.0f} s.{child.last_words()}")
        time.sleep(0.05)


def _ensure_database(database: Database) -> None:
    found = _ask(
        database,
        "psql",
        *_address(database),
        "-d",
        "postgres",
        "-Atc",
        "select datname from pg_database",
    )
    if NAME not in found.stdout.split():
        made = _ask(database, "createdb", *_address(database), NAME)
        if made.returncode != 0:
            raise StackError(f"The database could not be made: {made.stderr.strip()}")


def _address(database: Database) -> tuple[str, ...]:
    return ("-h", str(database.sockets), "-p", PORT, "-U", USER)


def _ask(database: Database, name: str, *arguments: str) -> "subprocess.CompletedProcess[str]":
    program = database.programs / "bin" / name
    return subprocess.run([program, *arguments], env=ENVIRONMENT, cwd="/", capture_output=True, text=True, check=False)
