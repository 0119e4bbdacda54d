"""What is wrong with something a person or a file said, as a value."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Problem:
    """``code`` is stable and for programs; ``sentence`` is for people: what is wrong, where, and what to do."""

    code: str
    sentence: str


@dataclass(frozen=True, slots=True)
class CellProblem:
    """A problem in a table: ``line`` as a text editor counts it, ``column`` by its heading ("" for the whole row)."""

    line: int
    column: str
    value: str
    code: str
    reason: str
