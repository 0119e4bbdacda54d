"""ISO 4406 cleanliness codes as values: read, print, compare with a target or a limit.

A code is three scale numbers, for particles at least 4, 6 and 14 µm(c) in size, counted by an automatic counter.
Counted under the microscope it has two, for 5 and 15 µm, and is written with a dash first: ``-/18/13``. How many
particles per millilitre a scale number means is told by ``samples.coding.iso4406``; this module needs no table.

Source: ISO 4406:2021. ``*`` and ``-`` in a three-number code: common use of the standard.
"""

import re
from dataclasses import dataclass
from itertools import pairwise
from typing import Final, Literal

LARGEST_NUMBER: Final = 28
SIZE_NAMES: Final = ("first", "second", "third")
_TOP_RANK: Final = LARGEST_NUMBER + 1

Mark = Literal["", "≥", ">", "-", "*"]
Verdict = Literal["met", "not met", "cannot tell", "not set"]


class CodeError(ValueError):
    """A code or count that ISO 4406 does not know. ``code`` is stable, ``sentence`` says what, where and what to do."""

    def __init__(self, code: str, sentence: str) -> None:
        super().__init__(sentence)
        self.code = code
        self.sentence = sentence


@dataclass(frozen=True, slots=True)
class ScaleNumber:
    """One number of a code: 0 to 28, with ``≥`` when fewer than 20 particles were counted; ``>28``; ``-``; or ``*``."""

    number: int | None
    mark: Mark = ""

    def __post_init__(self) -> None:
        if self.mark in ("-", "*"):
            allowed = self.number is None
        elif self.mark == ">":
            allowed = self.number == LARGEST_NUMBER
        else:
            allowed = self.number is not None and 0 <= self.number <= LARGEST_NUMBER
        if not allowed:
            raise CodeError(
                "code_number_impossible",
                f"“{self}” is not on the ISO 4406 scale. Use 0 to 28 or >28.",
            )

    def __str__(self) -> str:
        return f"{self.mark}{'' if self.number is None else self.number}"

    @property
    def is_measured(self) -> bool:
        return self.mark != "-"

    @property
    def rank(self) -> int | None:
        """Place in the order of sizes: the number itself, 29 for ``>28`` and ``*``, None when not measured."""
        if self.mark in (">", "*"):
            return _TOP_RANK
        return self.number


NOT_MEASURED: Final = ScaleNumber(None, "-")
TOO_MANY_TO_COUNT: Final = ScaleNumber(None, "*")


@dataclass(frozen=True, slots=True)
class IsoCode:
    """A whole code. Of a microscope count ``four`` is not measured, ``six`` is for 5 µm, ``fourteen`` for 15 µm."""

    four: ScaleNumber
    six: ScaleNumber
    fourteen: ScaleNumber

    def __post_init__(self) -> None:
        ranked = [(name, size) for name, size in zip(SIZE_NAMES, self.sizes, strict=True) if size.is_measured]
        if not ranked:
            raise CodeError(
                "code_empty", "The code has no measured size. Write at least one number, for example -/18/13."
            )
        for (left_name, left), (right_name, right) in pairwise(ranked):
            if (left.rank or 0) < (right.rank or 0):
                raise CodeError(
                    "code_out_of_order",
                    f"The {right_name} number ({right}) is higher than the {left_name} ({left}), but there cannot be "
                    "more large particles than small ones. Check the order of the numbers.",
                )

    def __str__(self) -> str:
        return "/".join(str(size) for size in self.sizes)

    @property
    def sizes(self) -> tuple[ScaleNumber, ScaleNumber, ScaleNumber]:
        return (self.four, self.six, self.fourteen)

    @property
    def is_two_number(self) -> bool:
        return not self.four.is_measured


@dataclass(frozen=True, slots=True)
class Comparison:
    """A code held against a target or limit, size by size. "Not met" means: dirtier than the figure."""

    four: Verdict
    six: Verdict
    fourteen: Verdict

    @property
    def sizes(self) -> tuple[Verdict, Verdict, Verdict]:
        return (self.four, self.six, self.fourteen)

    @property
    def overall(self) -> Verdict:
        for verdict in _WORST_FIRST:
            if verdict in self.sizes:
                return verdict
        return "not set"


_WORST_FIRST: Final[tuple[Verdict, ...]] = ("not met", "cannot tell", "met")

_SPELLINGS: Final = str.maketrans(
    {"⩾": "≥", "≧": "≥", "–": "-", "—": "-", "−": "-", "‐": "-", "‑": "-", "∕": "/", "⁄": "/", "／": "/", "＊": "*"}
)
_PART: Final = re.compile(r"(?P<mark>≥|>=|>)?\s*(?P<digits>[0-9]+)")


def parse_iso_code(text: str) -> IsoCode:
    """Read a code as laboratories write it.

    Accepts three numbers (``19/17/13``, ``14/12/≥7``, ``>28/20/15``, ``*/19/14``, ``-/18/13``) and two (``18/13``,
    read as ``-/18/13``), with spaces anywhere and ``>=`` for ``≥``. Numbers must not rise from left to right.

    Raises:
        CodeError: with code ``code_empty``, ``code_wrong_length``, ``code_number_too_high``,
            ``code_number_unreadable`` or ``code_out_of_order``.

    >>> str(parse_iso_code("18 / 13"))
    '-/18/13'
    """
    cleaned = text.translate(_SPELLINGS).strip()
    if not cleaned:
        raise CodeError("code_empty", "No code was given. Write three numbers, for example 19/17/13.")
    parts = [part.strip() for part in cleaned.split("/")]
    if len(parts) not in (2, 3):
        raise CodeError(
            "code_wrong_length",
            f"“{_short(cleaned)}” is not a code. Write three numbers (19/17/13) or two (18/13) with slashes between.",
        )
    offset = 3 - len(parts)
    numbers = [_parse_part(part, place) for place, part in enumerate(parts)]
    return IsoCode(*[NOT_MEASURED] * offset, *numbers)


def parse_target_code(text: str) -> IsoCode:
    """Read a target or limit: plain numbers, or ``-`` for a size that has no figure.

    Raises:
        CodeError: as `parse_iso_code`, and ``target_not_plain`` for ``≥``, ``>`` or ``*``.
    """
    code = parse_iso_code(text)
    for size in code.sizes:
        if size.mark in ("≥", ">", "*"):
            raise CodeError(
                "target_not_plain",
                f"“{size}” cannot be a target or limit. Write plain numbers, or - for a size without one: -/16/13.",
            )
    return code


def compare_with(code: IsoCode, figure: IsoCode) -> Comparison:
    """Hold a measured code against a target or limit code, size by size.

    A ``≥`` number at or below the figure proves nothing ("cannot tell"), nor does a size that was not measured. ``*``
    and ``>28`` are dirtier than any figure. A size for which the figure has a dash is "not set".

    >>> compare_with(parse_iso_code("14/12/≥7"), parse_target_code("15/13/8")).overall
    'cannot tell'
    """
    return Comparison(*(_compare_size(*pair) for pair in zip(code.sizes, figure.sizes, strict=True)))


def _compare_size(measured: ScaleNumber, figure: ScaleNumber) -> Verdict:
    if figure.number is None:
        return "not set"
    if measured.rank is None:
        return "cannot tell"
    if measured.rank > figure.number:
        return "not met"
    return "cannot tell" if measured.mark == "≥" else "met"


def _parse_part(part: str, place: int) -> ScaleNumber:
    if part == "-":
        return NOT_MEASURED
    if part == "*":
        return TOO_MANY_TO_COUNT
    match = _PART.fullmatch(part)
    if match is None:
        raise CodeError(
            "code_number_unreadable",
            f"“{_short(part)}” is not a code number. Use 0 to 28, ≥ before a low count, >28, - or *. "
            f"Check the {SIZE_NAMES[place]} number.",
        )
    return _marked_number(match["mark"] or "", match["digits"], place)


def _marked_number(mark: str, digits: str, place: int) -> ScaleNumber:
    number = int(digits) if len(digits) <= 3 else 1000
    if number > LARGEST_NUMBER:
        raise CodeError(
            "code_number_too_high",
            f"Code {_short(digits)} does not exist: the ISO 4406 scale ends at {LARGEST_NUMBER}. "
            f"Check the {SIZE_NAMES[place]} number.",
        )
    if mark == ">":
        return _above_the_scale(number, place)
    return ScaleNumber(number, "≥" if mark else "")


def _above_the_scale(number: int, place: int) -> ScaleNumber:
    if number != LARGEST_NUMBER:
        raise CodeError(
            "code_number_unreadable",
            f"“>{number}” is not a code number: only >28 exists. If fewer than 20 particles were counted, "
            f"write ≥{number}. Check the {SIZE_NAMES[place]} number.",
        )
    return ScaleNumber(number, ">")


def _short(text: str) -> str:
    return text if len(text) <= 24 else f"{text[:23]}…"
