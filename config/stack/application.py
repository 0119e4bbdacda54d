"""Siltwatch's own processes: the steps before serving, then the web server, the worker and beat."""

import signal
import socket
import subprocess
import sys
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from config.stack.children import Child, Program
from config.stack.errors import StackError
from config.stack.folders import CHECKOUT, private_folder
from config.stack.supervisor import Supervisor

WEB_WORKERS = "2"
WEB_THREADS = "4"
TASKS_AT_ONCE = "2"
FIRST_PERSON = """Nobody can log in yet. Add the first person, in another terminal here, with
  .venv/bin/python -m config.stack manage add_person NAME --role administrator"""


@dataclass(frozen=True)
class Application:
    state: Path
    logs: Path
    env: Mapping[str, str]

    def manage(self, *arguments: str) -> Program:
        argv = (sys.executable, "manage.py", *arguments)
        return Program(f"manage.py {arguments[0]}", argv, self.env, CHECKOUT, self.logs / f"{arguments[0]}.log")

    def web(self, listens: socket.socket) -> Program:
        bind = f"fd://{listens.fileno()}"
        arguments = ("config.wsgi", "--bind", bind, "--workers", WEB_WORKERS, "--threads", WEB_THREADS)
        more = ("--graceful-timeout", "10", "--no-control-socket", "--access-logfile", "-")
        # A killed supervisor takes the broker and the database along, so the master does not wait for open requests.
        program = self._kept_up("the web server", "web", signal.SIGQUIT, "-m", "gunicorn", *arguments, *more)
        return replace(program, listens=listens)

    def worker(self) -> Program:
        arguments = (
            "worker",
            "--concurrency",
            TASKS_AT_ONCE,
            "--loglevel",
            "INFO",
            "--without-mingle",
            "--without-gossip",
        )
        return self._kept_up("the worker", "worker", signal.SIGKILL, "-m", "celery", "-A", "config", *arguments)

    def beat(self) -> Program:
        arguments = ("beat", "--schedule", str(self.state / "beat-schedule"), "--pidfile", "", "--loglevel", "WARNING")
        return self._kept_up("beat", "beat", signal.SIGKILL, "-m", "celery", "-A", "config", *arguments)

    def mailbox(self, listens: socket.socket) -> Program:
        arguments = ("mailbox", "--socket", str(listens.fileno()), "--folder", str(private_folder(self.mail)))
        program = self._kept_up("the mail catcher", "mail", signal.SIGKILL, "-m", "config.stack", *arguments)
        return replace(program, listens=listens, is_extra=True)

    @property
    def mail(self) -> Path:
        return self.state / "mail"

    def _kept_up(self, name: str, log: str, death_signal: int, *arguments: str) -> Program:
        argv = (sys.executable, *arguments)
        return Program(
            name, argv, self.env, CHECKOUT, self.logs / f"{log}.log", death_signal=death_signal, restarts=True
        )

    @property
    def wants_demo(self) -> bool:
        return self.env.get("SILTWATCH_DEMO", "1") != "0"

    def logins(self) -> str:
        """Who can log in to the demo, or how to add the first person; empty where real people log in already."""
        if logins := self._ask("demo", "--logins"):
            return logins
        return FIRST_PERSON if self._ask("count_people") == "0" else ""

    def _ask(self, *arguments: str) -> str:
        argv = self.manage(*arguments).argv
        asked = subprocess.run(argv, env=dict(self.env), cwd=CHECKOUT, capture_output=True, text=True, check=False)
        if asked.returncode != 0:
            raise StackError(f"manage.py {' '.join(arguments)} failed:\n{asked.stderr.strip()}")
        return asked.stdout.strip()


def fresh_logs(state: Path) -> Path:
    """The folder for logs; the ones of the start before are kept once, as NAME.log.1."""
    logs = private_folder(state / "logs")
    for log in logs.glob("*.log"):
        log.rename(log.with_suffix(".log.1"))
    return logs


def prepare(supervisor: Supervisor, application: Application) -> None:
    """Migrate, collect the static files beside it, and load the demo fleet when there is nothing yet."""
    collecting = _collect(supervisor, application)
    supervisor.step(application.manage("migrate", "--no-input"))
    if application.wants_demo:
        supervisor.step(application.manage("demo", "--if-empty"))
    if collecting:
        supervisor.finish(collecting)
        _stamp(application).write_text(_sources())


def _collect(supervisor: Supervisor, application: Application) -> Child | None:
    if application.env.get("SILTWATCH_DEBUG", "").lower() in {"1", "true", "yes", "on"}:
        return None  # then they are served from where they lie
    if _stamp(application).exists() and _stamp(application).read_text() == _sources():
        return None
    return supervisor.start(application.manage("collectstatic", "--no-input", "--clear"))


def _stamp(application: Application) -> Path:
    return application.state / "static.stamp"


def _sources() -> str:
    """A text that changes when a static file, or a package that ships some, does."""
    files = [CHECKOUT / "requirements.lock", *sorted((CHECKOUT / "config" / "static").rglob("*"))]
    files += [CHECKOUT / "config" / "settings.py"]
    return "\n".join(f"{path.relative_to(CHECKOUT)} {path.stat().st_mtime_ns} {path.stat().st_size}" for path in files)
