"""One number as people and laboratories write it.

Zero, a bound ("<5"), "not detected" without a bound, and "no answer" are four different things and stay so.
"""

import re
from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal
from typing import Final, Literal

from samples.problems import Problem

State = Literal["number", "bound", "undetected", "missing", "problem"]
Qualifier = Literal["", "<", ">", "≥"]
DecimalMark = Literal[".", ","]

_MISSING: Final = frozenset(
    {
        "",
        "-",
        "--",
        "—",
        "–",
        "?",
        "n/a",
        "na",
        "n.a.",
        "n.a",
        "none",
        "null",
        "not tested",
        "not measured",
        "not reported",
    }
)
_UNDETECTED: Final = frozenset(
    {
        "nd",
        "n.d.",
        "n.d",
        "n/d",
        "not detected",
        "none detected",
        "trace",
        "traces",
        "tr",
        "tr.",
        "bdl",
        "below detection",
    }
)
_QUALIFIERS: Final[dict[str, Qualifier]] = {
    "": "",
    "<": "<",
    "<=": "<",
    "≤": "<",
    ">": ">",
    ">=": "≥",
    "≥": "≥",
}
_SPELLINGS: Final = str.maketrans(
    {"−": "-", "⩽": "≤", "⩾": "≥", "’": "'", **dict.fromkeys("\u00a0\u2007\u2009\u202f\t", " ")}
)
_MARKED: Final = re.compile(r"(?P<qualifier><=|>=|[<>≤≥])?\s*(?P<sign>[+-])?\s*(?P<body>.*)", re.DOTALL)
_DIGITS: Final = r"[0-9]+"
_EXPONENT: Final = r"(?P<exponent>[eE][+-]?[0-9]{1,3})?"
_PLAIN: Final = re.compile(rf"(?:{_DIGITS}(?:[.,][0-9]*)?|[.,]{_DIGITS}){_EXPONENT}")
_GROUPED: Final = re.compile(
    r"[0-9]{1,3}(?:(?P<gap>[ '])[0-9]{3}(?:(?P=gap)[0-9]{3})*(?:[.,][0-9]+)?"
    r"|(?:,[0-9]{3})+\.[0-9]+|(?:\.[0-9]{3})+,[0-9]+|(?:,[0-9]{3}){2,}|(?:\.[0-9]{3}){2,})"
)
_ONE_GROUP: Final = re.compile(r"[1-9][0-9]{0,2}[.,][0-9]{3}")
_NOT_FINITE: Final = re.compile(r"nan|inf|infinity", re.IGNORECASE)
_LONGEST: Final = 40
_LARGEST_EXPONENT: Final = 15


@dataclass(frozen=True, slots=True)
class ReadNumber:
    """What a cell says. ``value`` is set for "number" and "bound"; ``problem`` is set for "problem" and then only."""

    state: State
    reported: str
    value: Decimal | None = None
    qualifier: Qualifier = ""
    problem: Problem | None = None


def number_of(value: Decimal) -> ReadNumber:
    """A number that was never text, as if it had been read."""
    return ReadNumber("number", f"{value:f}", value)


def read_number(text: str, *, decimal_mark: DecimalMark | None = None, negative: bool = False) -> ReadNumber:
    """Read one number.

    Args:
        text: ``45.1``, ``45,1``, ``12 345``, ``1.234,5``, ``2.1e3``, ``<5``, ``≥20``, ``ND``, ``n/a``, empty
        decimal_mark: what stands before the decimals in this file, where that is known. Without it ``1,300`` is a
            problem, since it can mean 1300 or 1.3, and ``1.300`` is 1.3.
        negative: whether a value below zero makes sense (a temperature).

    Never raises. Problem codes: ``number_negative``, ``number_unreadable``, ``number_ambiguous``,
    ``number_not_finite``, ``number_too_large``, ``bound_not_positive``.

    >>> read_number("<5").qualifier, read_number("45,1").value, read_number("ND").state, read_number("n/a").state
    ('<', Decimal('45.1'), 'undetected', 'missing')
    """
    reported = " ".join(text.split())
    cleaned = reported.translate(_SPELLINGS).strip()
    if cleaned.casefold() in _MISSING:
        return ReadNumber("missing", reported)
    if cleaned.casefold() in _UNDETECTED:
        return ReadNumber("undetected", reported, qualifier="<")
    match = _MARKED.fullmatch(cleaned)
    assert match is not None, "the pattern matches every text"  # noqa: S101
    body = match["body"].strip()
    problem = _problem_of(body, reported, decimal_mark)
    if problem is not None:
        return ReadNumber("problem", reported, problem=problem)
    value = _value_of(body, decimal_mark)
    if match["sign"] == "-":
        value = -value
    return _judged(ReadNumber("number", reported, value, _QUALIFIERS[match["qualifier"] or ""]), negative=negative)


def decimal_mark_of(texts: Iterable[str]) -> DecimalMark | None:
    """The decimal mark that the numbers of one file prove, or None when they prove none, or both.

    ``45,1`` and ``1.234,5`` prove the comma, ``0.41`` and ``1,234.5`` the point; ``1,300`` and dates prove nothing.
    """
    proven = {mark for text in texts if (mark := _proof(text.strip())) is not None}
    return proven.pop() if len(proven) == 1 else None


def _proof(text: str) -> DecimalMark | None:
    body = text.lstrip("<>≤≥=+- ")
    if _GROUPED.fullmatch(body):
        grouped = re.search(r"([.,])[0-9]+\Z", body)
        if grouped is None or body.count(grouped[1]) > 1:
            return None
        return "," if grouped[1] == "," else "."
    if not _PLAIN.fullmatch(body) or _ONE_GROUP.fullmatch(body):
        return None
    if "," in body:
        return ","
    return "." if "." in body else None


def _problem_of(body: str, reported: str, decimal_mark: DecimalMark | None) -> Problem | None:
    shown = reported if len(reported) <= 30 else f"{reported[:29]}…"
    if _NOT_FINITE.fullmatch(body):
        return Problem("number_not_finite", f"“{shown}” is not a number. Leave the cell empty if there is no result.")
    if len(body) > _LONGEST or not (_PLAIN.fullmatch(body) or _GROUPED.fullmatch(body)):
        return Problem("number_unreadable", f"“{shown}” is not a number. Write the number alone, without text or unit.")
    if decimal_mark is None and "," in body and _ONE_GROUP.fullmatch(body):
        whole, short = body.replace(",", ""), body.replace(",", ".")
        return Problem("number_ambiguous", f"“{shown}” can mean {whole} or {short}. Write it one of these two ways.")
    return None


def _value_of(body: str, decimal_mark: DecimalMark | None) -> Decimal:
    compact = body.replace(" ", "").replace("'", "")
    marks = [mark for mark in compact if mark in ".,"]
    if not marks:
        return Decimal(compact)
    last: str = marks[-1]
    is_group = len(marks) > 1 and marks.count(last) == len(marks)
    if len(marks) == 1 and decimal_mark not in (None, last) and _ONE_GROUP.fullmatch(compact):
        is_group = True
    if is_group:
        return Decimal(compact.replace(last, ""))
    other = "," if last == "." else "."
    return Decimal(compact.replace(other, "").replace(last, "."))


def _judged(number: ReadNumber, *, negative: bool) -> ReadNumber:
    value = number.value
    if value is None or (problem := _value_problem(value, number, negative=negative)) is None:
        return number if number.qualifier == "" else ReadNumber("bound", number.reported, value, number.qualifier)
    return ReadNumber("problem", number.reported, problem=problem)


def _value_problem(value: Decimal, number: ReadNumber, *, negative: bool) -> Problem | None:
    if value and abs(value.adjusted()) > _LARGEST_EXPONENT:
        return Problem("number_too_large", f"“{number.reported}” is beyond any measured value. Check the number.")
    if value < 0 and not negative:
        return Problem("number_negative", f"“{number.reported}” is below zero, which this cannot be. Check the sign.")
    if number.qualifier == "<" and value <= 0 and not negative:
        return Problem("bound_not_positive", f"“{number.reported}” says less than zero. Check the number.")
    return None
