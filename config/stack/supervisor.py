"""Keeps children running, and stops them in reverse order whatever happens."""

import signal
import time
from collections.abc import Callable
from dataclasses import dataclass
from types import TracebackType
from typing import Self

from config.stack.children import Child, Program
from config.stack.errors import StackError
from config.stack.leash import ON_LINUX, Watcher

QUICK_SECONDS = 20.0
QUICK_FAILURES = 5
LONGEST_PAUSE = 30.0
TICK = 0.2

Say = Callable[[str], None]


@dataclass
class Place:
    """Where a child stands in the order, also while it is between two lives."""

    program: Program
    child: Child | None
    quick_failures: int = 0
    due: float = 0.0


class Supervisor:
    """A context manager: children started in it are stopped, last first, when it is left."""

    def __init__(self, say: Say) -> None:
        self.say = say
        self.places: list[Place] = []
        self._watcher = None if ON_LINUX else Watcher()

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.stop()

    def start(self, program: Program) -> Child:
        child = self._spawn(program)
        self.places.append(Place(program, child))
        return child

    def step(self, program: Program) -> None:
        """Run a program to its end before anything else goes on."""
        self.finish(self.start(program))

    def finish(self, child: Child) -> None:
        code = child.process.wait()
        self.places = [place for place in self.places if place.child is not child]
        if code != 0:
            raise StackError(f"{child.program.name} failed with exit code {code}.{child.last_words()}")

    def watch(self) -> None:
        """Stay until a stop is asked for (KeyboardInterrupt) or a child cannot be kept up (StackError)."""
        while True:
            for place in list(self.places):
                self._look_at(place)
            time.sleep(TICK)

    def stop(self) -> None:
        """Stop every child, last started first. Further requests to stop are not heard meanwhile."""
        before = [(number, signal.signal(number, signal.SIG_IGN)) for number in (signal.SIGINT, signal.SIGTERM)]
        while self.places:
            child = self.places.pop().child
            if child is not None:
                child.stop()
        if self._watcher:
            self._watcher.close()
        for number, handler in before:
            signal.signal(number, handler)

    def _spawn(self, program: Program) -> Child:
        child = Child(program)
        if self._watcher:
            self._watcher.watch(child.pid, program.death_signal)
        return child

    def _look_at(self, place: Place) -> None:
        if place.child is None:
            if time.monotonic() >= place.due:
                place.child = self._spawn(place.program)
        elif (code := place.child.ended()) is not None:
            self._ended(place, place.child, code)

    def _ended(self, place: Place, child: Child, code: int) -> None:
        name = place.program.name
        if self._watcher:
            self._watcher.forget(child.pid)
        if not place.program.restarts:
            raise StackError(f"{name} ended with exit code {code}; the rest cannot run without it.{child.last_words()}")
        lived = time.monotonic() - child.started
        place.quick_failures = place.quick_failures + 1 if lived < QUICK_SECONDS else 1
        if place.quick_failures >= QUICK_FAILURES:
            self._give_up(place, child)
            return
        pause = min(2.0 ** (place.quick_failures - 1), LONGEST_PAUSE)
        self.say(f"{name} ended with exit code {code}; starting it again in {pause:.0f} s.")
        place.child, place.due = None, time.monotonic() + pause

    def _give_up(self, place: Place, child: Child) -> None:
        failed = f"{place.program.name} failed {QUICK_FAILURES} times in a row"
        if not place.program.is_extra:
            raise StackError(f"{failed}; giving up.{child.last_words()}")
        self.say(f"{failed}; going on without it.{child.last_words()}")
        self.places.remove(place)
        if place.program.listens:
            place.program.listens.close()  # so that callers are refused at once instead of waiting for an answer
