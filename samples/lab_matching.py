"""Which reservoir, sample point and laboratory a row of a lab file means. Exact names only; never a guess."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, field
from datetime import date

from fleet.models import Reservoir, ReservoirAlias, SamplePoint, Site
from samples.models import Laboratory
from samples.problems import Problem


@dataclass(frozen=True)
class Names:
    """Every name that may stand in a file, without regard to case and spaces around it."""

    by_tag: dict[str, list[Reservoir]] = field(default_factory=lambda: defaultdict(list))
    by_alias: dict[str, list[ReservoirAlias]] = field(default_factory=lambda: defaultdict(list))
    by_name: dict[str, list[Reservoir]] = field(default_factory=lambda: defaultdict(list))
    points: dict[int, list[SamplePoint]] = field(default_factory=lambda: defaultdict(list))
    laboratories: dict[str, list[Laboratory]] = field(default_factory=lambda: defaultdict(list))

    def reservoir(self, text: str, day: date) -> Reservoir | Problem:
        """By tag, then by another name valid on that day, then by "machine · reservoir"."""
        name = plain(text)
        aliases = [alias for alias in self.by_alias.get(name, []) if _valid_on(alias, day)]
        for found in (self.by_tag.get(name, []), [alias.reservoir for alias in aliases], self.by_name.get(name, [])):
            distinct = {reservoir.pk: reservoir for reservoir in found}
            if len(distinct) > 1:
                tags = ", ".join(sorted(reservoir.tag for reservoir in distinct.values()))
                said = f"“{text[:60]}” can be any of {tags}. Write the tag."
                return Problem("reservoir_ambiguous", said)
            if distinct:
                return _in_service(next(iter(distinct.values())), day)
        if name in self.by_alias:
            said = f"“{text[:60]}” was another name of a reservoir, but not on {day:%-d %b %Y}. Write the tag."
            return Problem("reservoir_name_lapsed", said)
        said = f"No reservoir is called “{text[:60]}”. Write its tag, or give it this other name in the register."
        return Problem("reservoir_unknown", said)

    def point(self, reservoir: Reservoir, text: str) -> SamplePoint | Problem:
        """The point of that name; the planned point where the row names none."""
        points = self.points.get(reservoir.pk, [])
        if text.strip():
            found = [point for point in points if plain(point.name) == plain(text)]
        else:
            found = [point for point in points if point.is_default] or points[:1] * (len(points) == 1)
        if found:
            return found[0]
        known = ", ".join(point.name for point in points) or "none is registered"
        if text.strip():
            return Problem("point_unknown", f"“{text[:60]}” is no sample point of {reservoir}. Known: {known}.")
        return Problem("point_missing", f"{reservoir} has no planned sample point. Name the point. Known: {known}.")

    def laboratory(self, text: str) -> Laboratory | Problem | None:
        if not text.strip():
            return None
        found = self.laboratories.get(plain(text), [])
        if len(found) == 1:
            return found[0]
        said = f"No laboratory is called “{text[:60]}”. Add it to the register under that name, or correct the file."
        return Problem("laboratory_unknown", said)


def _in_service(found: Reservoir, day: date) -> Reservoir | Problem:
    if found.retired_on is None or day <= found.retired_on:
        return found
    said = f"{found} was taken out of service on {found.retired_on:%-d %b %Y}. Check the date, or correct the register."
    return Problem("reservoir_retired", said)


def read_names(site: Site | None = None) -> Names:
    """All names of one site, or of every site, in four queries."""
    reservoirs = Reservoir.objects.with_place()
    if site is not None:
        reservoirs = reservoirs.filter(area__site=site)
    known = {reservoir.pk: reservoir for reservoir in reservoirs}
    names = Names()
    for reservoir in known.values():
        names.by_tag[plain(reservoir.tag)].append(reservoir)
        names.by_name[plain(str(reservoir))].append(reservoir)
    for alias in ReservoirAlias.objects.filter(reservoir__in=known):
        alias.reservoir = known[alias.reservoir_id]
        names.by_alias[plain(alias.name)].append(alias)
    for point in SamplePoint.objects.filter(reservoir__in=known):
        names.points[point.reservoir_id].append(point)
    for laboratory in Laboratory.objects.all():
        names.laboratories[plain(laboratory.name)].append(laboratory)
    return names


def plain(text: str) -> str:
    return " ".join(text.split()).casefold()


def _valid_on(alias: ReservoirAlias, day: date) -> bool:
    begun = alias.valid_from is None or alias.valid_from <= day
    return begun and (alias.valid_to is None or day < alias.valid_to)
