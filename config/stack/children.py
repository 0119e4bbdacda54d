"""One child process: what it is, how it starts, how it stops."""

import contextlib
import os
import signal
import socket
import subprocess
import time
from collections import deque
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import IO

from config.stack.accounts import Account
from config.stack.errors import StackError
from config.stack.leash import tie

QUOTED_LINES = 15


@dataclass(frozen=True)
class Program:
    """What to run.

    `restarts`: it has no state and is started again when it ends; `is_extra`: it may be missing; `listens`: a socket
    that each of its lives inherits.
    """

    name: str
    argv: tuple[str, ...]
    env: Mapping[str, str]
    folder: Path
    log: Path | None = None
    stop_signal: int = signal.SIGTERM
    death_signal: int = signal.SIGKILL
    stop_seconds: float = 15.0
    restarts: bool = False
    is_extra: bool = False
    listens: socket.socket | None = None
    account: Account | None = None


class Child:
    """A started program, in a session of its own so that a terminal's Ctrl-C reaches only the supervisor."""

    def __init__(self, program: Program) -> None:
        self.program = program
        self.started = time.monotonic()
        log = open(program.log, "ab") if program.log else None  # noqa: SIM115 - closed right after the fork
        try:
            self.process = self._spawn(log)
        except OSError as error:
            raise StackError(f"{program.name} could not be started: {error}") from error
        finally:
            if log:
                log.close()

    def _spawn(self, log: IO[bytes] | None) -> "subprocess.Popen[bytes]":
        program, account = self.program, self.program.account
        return subprocess.Popen(
            program.argv,
            env=dict(program.env),
            cwd=program.folder,
            stdin=subprocess.DEVNULL,
            stdout=log,
            stderr=subprocess.STDOUT if log else None,
            start_new_session=True,
            pass_fds=(program.listens.fileno(),) if program.listens else (),
            preexec_fn=tie(program.death_signal),  # noqa: PLW1509 - the supervisor has one thread
            user=account.uid if account else None,
            group=account.gid if account else None,
            extra_groups=[] if account else None,
        )

    @property
    def pid(self) -> int:
        return self.process.pid

    def ended(self) -> int | None:
        return self.process.poll()

    def stop(self) -> None:
        """Ask the leader; after its patience is over end the whole group."""
        if self.ended() is not None:
            return
        self.process.send_signal(self.program.stop_signal)
        try:
            self.process.wait(self.program.stop_seconds)
        except subprocess.TimeoutExpired:
            self.kill()

    def kill(self) -> None:
        with contextlib.suppress(ProcessLookupError):
            os.killpg(self.pid, signal.SIGKILL)
        self.process.wait()

    def last_words(self) -> str:
        """The end of its log, indented, for a message."""
        log = self.program.log
        if log is None or not log.exists():
            return ""
        with log.open(encoding="utf-8", errors="replace") as lines:
            return "".join(f"\n    {line.rstrip()}" for line in deque(lines, QUOTED_LINES))
