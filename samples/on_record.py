"""Whether a row of a lab file is on record already, and where it says something else than the record does."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable
from datetime import date, datetime
from zoneinfo import ZoneInfo

from samples.models import Result, Sample
from samples.results import SampleEntry


class OnRecord:
    """The samples of one reservoir, findable by what makes two of them the same bottle."""

    def __init__(self, samples: Iterable[Sample], zone: ZoneInfo) -> None:
        self.zone = zone
        self._by_number: dict[tuple[int | None, str, date], list[Sample]] = defaultdict(list)
        self._by_moment: dict[tuple[int, datetime], list[Sample]] = defaultdict(list)
        self._by_day: dict[tuple[int, date], list[Sample]] = defaultdict(list)
        for sample in samples:
            self.add(sample)

    def add(self, sample: Sample) -> None:
        day = self._day(sample.drawn_at)
        if sample.lab_number:
            self._by_number[sample.laboratory_id, sample.lab_number, day].append(sample)
        self._by_moment[sample.point_id, sample.drawn_at].append(sample)
        self._by_day[sample.point_id, day].append(sample)

    def twins(self, entry: SampleEntry, *, day_only: bool) -> list[Sample]:
        """Same laboratory number and day; or same point and moment; without a time of day, same point and day.

        Two numbers of one day are two bottles.
        """
        facts, day = entry.facts, self._day(entry.facts.drawn_at)
        laboratory_id = entry.laboratory.pk if entry.laboratory else None
        numbered = self._by_number.get((laboratory_id, facts.lab_number, day), []) if facts.lab_number else []
        if numbered:
            return numbered
        same_moment = self._by_moment.get((entry.point.pk, facts.drawn_at), [])
        if same_moment or not day_only:
            return same_moment
        same_day = self._by_day.get((entry.point.pk, day), [])
        return [one for one in same_day if not (facts.lab_number and one.lab_number)]

    def _day(self, moment: datetime) -> date:
        return moment.astimezone(self.zone).date()


def differences(results: Iterable[Result], lab_number: str, sample: Sample) -> list[str]:
    """What the row says that the record does not, in words; empty where the row adds nothing to it."""
    recorded = {result.measurand_id: result for result in sample.current_results}
    found = []
    if lab_number and sample.lab_number and lab_number != sample.lab_number:
        found.append(f"number {lab_number} here, {sample.lab_number} on record")
    for result in results:
        other = recorded.get(result.measurand_id)
        if other is None:
            found.append(f"{result.measurand.symbol} {result.reported_text} here, nothing on record")
        elif _known(other) != _known(result):
            found.append(f"{result.measurand.symbol} {_said(result)} here, {_said(other)} on record")
    return found


def _known(result: Result) -> tuple[float | None, float | None, float | None, str]:
    return result.value, result.low, result.high, result.qualifier


def _said(result: Result) -> str:
    return f"{result.reported_text} {result.reported_unit}".strip()
