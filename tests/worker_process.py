"""The real Celery worker (or beat) as a process of its own, on the tests' database and broker."""

import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Mapping
from pathlib import Path

import redis
from django.conf import settings

from config.stack.folders import CHECKOUT
from config.stack.leash import tie

READY_SECONDS = 60.0
POLL_SECONDS = 0.05


class CeleryProcess:
    """Started in a session of its own; `kill` ends the whole group as an outage would."""

    def __init__(self, arguments: tuple[str, ...], env: Mapping[str, str], log: Path, ready: str) -> None:
        self.arguments, self.env, self.log, self.ready = arguments, env, log, ready
        self.process: subprocess.Popen[bytes] | None = None

    @property
    def pid(self) -> int:
        assert self.process is not None, "not started"
        return self.process.pid

    @property
    def alive(self) -> bool:
        return self.process is not None and self.process.poll() is None

    def start(self) -> None:
        with self.log.open("wb") as log:
            self.process = subprocess.Popen(
                [sys.executable, "-m", "celery", "-A", "config", *self.arguments],
                env=dict(self.env),
                cwd=CHECKOUT,
                stdout=log,
                stderr=subprocess.STDOUT,
                start_new_session=True,
                preexec_fn=tie(signal.SIGKILL),  # noqa: PLW1509 - called from the main thread
            )
        self.wait_until(lambda: self.ready in self.output(), READY_SECONDS)

    def kill(self) -> None:
        """kill -9 of the master and all its children."""
        if self.alive:
            os.killpg(self.pid, signal.SIGKILL)
            assert self.process is not None
            self.process.wait()

    def restart(self) -> None:
        self.kill()
        self.start()

    def output(self) -> str:
        return self.log.read_text(errors="replace")

    def wait_until(self, predicate: Callable[[], object], timeout: float = 15.0) -> None:
        """Ask until the answer is true; fail with the process's log when it is not in time."""
        deadline = time.monotonic() + timeout
        while not predicate():
            assert time.monotonic() < deadline, f"not so within {timeout} s. The log says:\n{self.output()[-4000:]}"
            assert self.process is None or self.alive or self.ready in self.output(), self.output()[-4000:]
            time.sleep(POLL_SECONDS)


class Worker(CeleryProcess):
    """The worker, and a look at the broker's queue."""

    def __init__(self, env: Mapping[str, str], log: Path, broker: "redis.Redis") -> None:
        arguments = ("worker", "--concurrency", "2", "--loglevel", "INFO", "--without-mingle", "--without-gossip")
        super().__init__(arguments, env, log, ready=" ready.")
        self.broker = broker

    def idle(self) -> bool:
        """No message waits and none is being worked on (they are acknowledged late)."""
        waiting = any(self.broker.llen(queue.name) for queue in settings.CELERY_TASK_QUEUES)
        return not waiting and not self.broker.hlen("unacked")

    def wait_idle(self, timeout: float = 15.0) -> None:
        self.wait_until(self.idle, timeout)
