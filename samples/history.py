"""All that is on record for one reservoir, read once: what the outlook is computed from and the page is drawn from."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterator
from dataclasses import dataclass, replace
from datetime import date, datetime
from functools import cached_property

from django.db.models import Prefetch

from fleet.figures import figure_for
from fleet.models import Event, Limit, Measurand, OilCharge, Reservoir, Target
from samples.models import Doubt, Result, Sample


@dataclass(frozen=True, slots=True)
class Reported:
    """One current result with the sample it came from."""

    sample: Sample
    result: Result

    @property
    def drawn_at(self) -> datetime:
        return self.sample.drawn_at


@dataclass(frozen=True)
class History:
    """A reservoir with its samples (oldest first, each with `current_results`), events, charges and dated figures."""

    reservoir: Reservoir
    samples: list[Sample]
    events: list[Event]
    charges: list[OilCharge]
    targets: list[Target]
    limits: list[Limit]

    @cached_property
    def accepted(self) -> list[Sample]:
        """What speaks for the oil in the reservoir: not in doubt, not set aside, and not new oil from its drum."""
        accepted = [sample for sample in self.samples if sample.verdict == Sample.Verdict.ACCEPTED]
        return [sample for sample in accepted if sample.reason != Sample.Reason.NEW_OIL]

    @cached_property
    def measurands(self) -> list[Measurand]:
        """What was ever measured here, in the catalogue's order."""
        found = {result.measurand.key: result.measurand for sample in self.samples for result in _results(sample)}
        return sorted(found.values(), key=lambda measurand: (measurand.position, measurand.key))

    @property
    def latest(self) -> Sample | None:
        return self.accepted[-1] if self.accepted else None

    @property
    def current_charge(self) -> OilCharge | None:
        return next((charge for charge in self.charges if charge.ended_at is None), None)

    def reported(self, key: str, accepted_only: bool = True) -> list[Reported]:
        """Every current result of one measurand, oldest first."""
        if accepted_only:
            return list(self._accepted_by_key.get(key, []))
        return [r for sample in self.samples for r in _reported(sample) if r.result.measurand.key == key]

    @cached_property
    def _accepted_by_key(self) -> dict[str, list[Reported]]:
        by_key: dict[str, list[Reported]] = {}
        for sample in self.accepted:
            for reported in _reported(sample):
                by_key.setdefault(reported.result.measurand.key, []).append(reported)
        return by_key

    def including(self, sample: Sample) -> History:
        """This history with one more sample in its place; it needs `current_results`."""
        place = bisect_right(self.samples, sample.drawn_at, key=lambda one: one.drawn_at)
        return replace(self, samples=[*self.samples[:place], sample, *self.samples[place:]])

    def charge_at(self, moment: datetime) -> OilCharge | None:
        return next(
            (c for c in self.charges if c.started_at <= moment and (c.ended_at is None or moment < c.ended_at)), None
        )

    def target_at(self, key: str, moment: datetime) -> Target | None:
        return figure_for(self.targets, key, self._site_day(moment), self._fluid_at(moment))

    def limit_at(self, key: str, moment: datetime) -> Limit | None:
        return figure_for(self.limits, key, self._site_day(moment), self._fluid_at(moment))

    def _site_day(self, moment: datetime) -> date:
        return moment.astimezone(self.reservoir.area.site.zone).date()

    def _fluid_at(self, moment: datetime) -> int | None:
        charge = self.charge_at(moment)
        return charge.fluid_id if charge else None


def read_history(reservoir: Reservoir) -> History:
    """Everything about one reservoir in a fixed number of queries. Needs `reservoir.area.site` loaded with it."""
    current = Result.objects.filter(current=True).select_related("measurand").order_by("measurand__position")
    samples = (
        Sample.objects.filter(reservoir=reservoir)
        .select_related("point", "laboratory")
        .prefetch_related(
            Prefetch("results", queryset=current, to_attr="current_results"),
            Prefetch("doubts", queryset=Doubt.objects.all(), to_attr="found_doubts"),
        )
        .order_by("drawn_at", "pk")
    )
    charges = list(OilCharge.objects.filter(reservoir=reservoir).select_related("fluid").order_by("started_at"))
    fluids = {charge.fluid_id for charge in charges}
    return History(
        reservoir=reservoir,
        samples=list(samples),
        events=list(Event.objects.filter(reservoir=reservoir).order_by("at", "pk")),
        charges=charges,
        targets=list(Target.objects.for_reservoir(reservoir, fluids)),
        limits=list(Limit.objects.for_reservoir(reservoir, fluids)),
    )


def _reported(sample: Sample) -> Iterator[Reported]:
    return (Reported(sample, result) for result in _results(sample))


def _results(sample: Sample) -> list[Result]:
    results: list[Result] = getattr(sample, "current_results", [])
    return results
