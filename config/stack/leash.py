"""Ties a child's life to its parent's, so that nothing survives a supervisor that was killed with -9.

Linux sends a signal of the child's choice when the thread that started it ends. Elsewhere a watcher process reads
process numbers from a pipe and, when the pipe's other end disappears with the supervisor, ends what it was told.
"""

import contextlib
import ctypes
import os
import platform
import signal
import subprocess
import sys
from collections.abc import Callable

PR_SET_PDEATHSIG = 1
ON_LINUX = platform.system() == "Linux"
_LIBC = ctypes.CDLL(None) if ON_LINUX else None


def tie(death_signal: int) -> Callable[[], None] | None:
    """Return what a new child runs just before its program starts, or None where the kernel has no such call.

    Run it after a change of account: the kernel clears the wish at that point. Start children from the main thread
    only, because the signal comes at the end of the starting thread.
    """
    libc, parent = _LIBC, os.getpid()
    if libc is None:
        return None

    def ask_kernel() -> None:
        libc.prctl(PR_SET_PDEATHSIG, int(death_signal))
        if os.getppid() != parent:  # the parent died before the wish was made
            os._exit(1)

    return ask_kernel


def follow_parent() -> None:
    """Let this process itself be asked to stop when the one that started it (make) is killed."""
    if _LIBC is not None:
        _LIBC.prctl(PR_SET_PDEATHSIG, int(signal.SIGTERM))


class Watcher:
    """The stand-in for the kernel's help: a process that outlives the supervisor by just one errand."""

    def __init__(self) -> None:
        self._process: subprocess.Popen[str] | None = None

    def watch(self, pid: int, death_signal: int) -> None:
        if self._process is None:
            self._process = subprocess.Popen(
                [sys.executable, "-m", "config.stack.leash"], stdin=subprocess.PIPE, text=True, start_new_session=True
            )
        self._tell(f"{pid} {int(death_signal)}")

    def forget(self, pid: int) -> None:
        if self._process is not None:
            self._tell(f"{pid} 0")

    def close(self) -> None:
        if self._process is not None:
            self._process.communicate("")
            self._process = None

    def _tell(self, line: str) -> None:
        if self._process is not None and self._process.stdin is not None:
            self._process.stdin.write(line + "\n")
            self._process.stdin.flush()


def _errand(lines: list[str]) -> None:
    wishes: dict[str, int] = {}
    for line in lines:
        name, wish = line.split()
        wishes[name] = int(wish)
    for pid, number in wishes.items():
        if number:
            with contextlib.suppress(ProcessLookupError):
                os.kill(int(pid), number)


if __name__ == "__main__":
    _errand(sys.stdin.readlines())
