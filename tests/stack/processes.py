"""Looking at other processes from outside."""

import subprocess
import time
from collections.abc import Callable, Iterable


def processes() -> dict[int, tuple[int, str]]:
    """Every process that still runs, with its parent and state; the dead that nobody buried are left out."""
    shown = subprocess.run(["ps", "-eo", "pid=,ppid=,stat="], capture_output=True, text=True, check=True)
    rows = (line.split() for line in shown.stdout.splitlines())
    return {int(pid): (int(parent), state) for pid, parent, state in rows if not state.startswith("Z")}


def descendants(root: int) -> set[int]:
    now = processes()
    found, frontier = set(), {root}
    while frontier:
        frontier = {pid for pid, (parent, _) in now.items() if parent in frontier}
        found |= frontier
    return found


def command_line(pid: int) -> str:
    return subprocess.run(["ps", "-o", "args=", "-p", str(pid)], capture_output=True, text=True, check=False).stdout


def wait_for(predicate: Callable[[], object], timeout: float = 20.0, what: str = "it") -> None:
    deadline = time.monotonic() + timeout
    while not predicate():
        assert time.monotonic() < deadline, f"{what} did not happen within {timeout} s"
        time.sleep(0.05)


def wait_until_gone(pids: Iterable[int], timeout: float = 20.0) -> None:
    wanted = set(pids)
    wait_for(lambda: not wanted & processes().keys(), timeout, f"the end of {sorted(wanted)}")
