"""One sample's results against the figures of its day and against the sample before."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import datetime
from math import nan

from fleet.models import Limit, Measurand, StandingWord, Target
from fleet.wording import signed
from samples.history import History
from samples.lines import code_number, figure_key, line_of
from samples.models import Result, Sample
from samples.outlooks import WORDS
from samples.sample_codes import number_of
from samples.series import scale_spec
from samples.tables import cell_text
from samples.trends.standing import known_range, stand


@dataclass(frozen=True, slots=True)
class JudgedResult:
    """One result as a person compares it. `word` is empty where nothing is set to judge by."""

    result: Result
    text: str
    code: str
    word: str
    target: str
    target_source: str
    limit: str
    limit_source: str
    before: str
    change: str

    @property
    def unit(self) -> str:
        return self.result.measurand.unit


def judged_results(
    results: Iterable[Result], history: History, drawn_at: datetime, previous: Sample | None = None
) -> list[JudgedResult]:
    """The results in the catalogue's order, each with target and limit of the day it was drawn."""
    before = {result.measurand.key: result for result in previous.current_results} if previous else {}
    ordered = sorted(results, key=lambda result: result.measurand.position)
    return [_judged(result, history, drawn_at, before.get(result.measurand.key)) for result in ordered]


def _judged(result: Result, history: History, drawn_at: datetime, before: Result | None) -> JudgedResult:
    key = result.measurand.key
    target = history.target_at(figure_key(key), drawn_at)
    limit = history.limit_at(figure_key(key), drawn_at)
    return JudgedResult(
        result=result,
        text=cell_text(result),
        code=str(number_of(result)) if _is_count(result) else "",
        word=_word(result, history, drawn_at, target, limit),
        target=figure_in_column(target, key),
        target_source=target.source if target else "",
        limit=figure_in_column(limit, key),
        limit_source=limit.source if limit else "",
        before="" if before is None else str(number_of(before)) if _is_count(before) else cell_text(before),
        change="" if before is None else _change(result, before),
    )


def _word(result: Result, history: History, drawn_at: datetime, target: Target | None, limit: Limit | None) -> str:
    """The standing of this value on its day, by the figures alone."""
    charge = history.charge_at(drawn_at)
    key = result.measurand.key
    spec = scale_spec(result.measurand, charge.fluid.baseline(key) if charge else None)
    target_line, limit_line = line_of(target, key, spec), line_of(limit, key, spec)
    if not (target_line.is_set or limit_line.is_set):
        return ""
    value, low, high = (nan if side is None else side for side in (result.value, result.low, result.high))
    return StandingWord(WORDS[stand(known_range(value, low, high, result.qualifier, spec), target_line, limit_line)])


def figure_in_words(figure: Target | Limit | None, key: str) -> str:
    """How a figure is spoken of: a code number for a count, “600 mg/kg” otherwise; empty where it leaves a size out."""
    number = code_number(figure, key)
    if figure is None or (figure.code and number is None):
        return ""
    return figure.amount if number is None else str(number)


def figure_in_column(figure: Target | Limit | None, key: str) -> str:
    """How it stands in a column whose unit is at the head of the row: the bare numbers, unless it is a change."""
    bare = figure is not None and not figure.code and figure.basis == figure.Basis.ABSOLUTE
    return figure.numbers if figure is not None and bare else figure_in_words(figure, key)


def _change(now: Result, before: Result) -> str:
    """Code steps for counts, the difference for a value, nothing where one of the two is only a bound."""
    if _is_count(now):
        new, old = number_of(now), number_of(before)
        if new.mark or old.mark or new.number is None or old.number is None:
            return ""
        steps = new.number - old.number
        return "same" if steps == 0 else f"{signed(steps, 0)} step{'' if abs(steps) == 1 else 's'}"
    if now.value is None or before.value is None:
        return ""
    moved = round(now.value - before.value, now.measurand.decimals)
    return signed(moved, now.measurand.decimals) if moved else "same"


def _is_count(result: Result) -> bool:
    return bool(result.measurand.kind == Measurand.Kind.COUNT)
