"""What stands beside the form while a result is being logged: the code, the change, and every doubt, before saving."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime

from fleet.models import Limit, Measurand, Target
from samples.checks.candidates import Doubt
from samples.history import History
from samples.judgement import JudgedResult, judged_results
from samples.lines import CODE_KEY
from samples.models import Sample
from samples.readings import Reading
from samples.results import EntryError, SampleEntry, preview, unsaved_results
from samples.sample_codes import code_text


@dataclass(frozen=True)
class Panel:
    """`compared`: the checks have run. `errors` are those that the checks found, not the form's own."""

    code: str
    lines: Sequence[JudgedResult]
    target: Target | None
    limit: Limit | None
    previous: Sample | None = None
    previous_code: str = ""
    errors: Sequence[EntryError] = ()
    doubts: Sequence[Doubt] = ()
    compared: bool = False


def panel_of(entry: SampleEntry, history: History, known: Mapping[str, Measurand], now: datetime) -> Panel:
    """Of a whole entry: everything that saving it would check."""
    found = preview(entry, history, now, known)
    drawn_at = entry.facts.drawn_at
    return Panel(
        code=str(found.code) if found.code else "",
        lines=judged_results(found.results, history, drawn_at, found.previous),
        target=history.target_at(CODE_KEY, drawn_at),
        limit=history.limit_at(CODE_KEY, drawn_at),
        previous=found.previous,
        previous_code=str(found.previous_code) if found.previous_code else "",
        errors=found.errors,
        doubts=found.doubts,
        compared=bool(found.results) and not found.errors,
    )


def panel_of_readings(
    readings: Sequence[Reading], history: History, known: Mapping[str, Measurand], now: datetime
) -> Panel:
    """Of an entry whose point or moment is still missing: the code and the figures of today, nothing compared."""
    results = unsaved_results(readings, known)
    return Panel(
        code=code_text(results),
        lines=judged_results(results, history, now),
        target=history.target_at(CODE_KEY, now),
        limit=history.limit_at(CODE_KEY, now),
    )
