"""Siltwatch's own processes: the steps before serving, then the web server, the worker and beat."""

import signal
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


@dataclass(frozen=True)
class Application:
    state: Path
    logs: Path
    env: Mapping[str, str]

    def manage(self, *arguments: str) -> Program:
        argv = (sys.executable, "manage.py", *arguments)
        return Program(f"manage.py {arguments[0]}", argv, self.env, CHECKOUT, self.logs / f"{arguments[0]}.log")

    def web(self, host: str, port: int) -> Program:
        arguments = ("config.wsgi", "--bind", f"{host}:{port}", "--workers", WEB_WORKERS, "--threads", WEB_THREADS)
        more = ("--graceful-timeout", "10", "--no-control-socket", "--access-logfile", "-")
        # A killed supervisor takes the broker and the database along, so the master does not wait for open requests.
        return self._kept_up("the web server", "web", signal.SIGQUIT, "-m", "gunicorn", *arguments, *more)

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

    def mailbox(self, port: int) -> Program:
        arguments = ("mailbox", "--host", "127.0.0.1", "--port", str(port), "--folder", str(self.state / "mail"))
        return replace(
            self._kept_up("the mail catcher", "mail", signal.SIGKILL, "-m", "config.stack", *arguments), is_extra=True
        )

    def _kept_up(self, name: str, log: str, death_signal: int, *arguments: str) -> Program:
        argv = (sys.executable, *arguments)
        return Program(
            name, argv, self.env, CHECKOUT, self.logs / f"{log}.log", death_signal=death_signal, restarts=True
        )

    @property
    def wants_demo(self) -> bool:
        return self.env.get("SILTWATCH_DEMO", "1") != "0"

    def logins(self) -> str:
        if not self.wants_demo:
            return ""
        asked = subprocess.run(
            self.manage("demo", "--logins").argv,
            env=dict(self.env),
            cwd=CHECKOUT,
            capture_output=True,
            text=True,
            check=False,
        )
        if asked.returncode != 0:
            raise StackError(f"manage.py demo --logins failed:\n{asked.stderr.strip()}")
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
