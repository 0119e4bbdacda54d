"""How a noun of the register is described once, so that the same four pages show and change all of them.

To add one: a model, a form on `PlantForm`, a `Noun` with its columns made `known`, and `noun_paths(NOUN)` in the urls.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from datetime import date, datetime
from operator import attrgetter
from typing import Any, Protocol

from django.db.models import Model, Q, QuerySet
from django.urls import reverse

from fleet.forms.base import PlantForm
from fleet.models import Person, Role
from fleet.refusals import refusing


class Save(Protocol):
    """Saves what a valid form holds and returns the row. May raise RefusedError."""

    def __call__(self, form: Any, by: Person, now: datetime) -> Model: ...


def save_form(form: PlantForm, by: Person, now: datetime) -> Model:
    """For nouns that nothing else depends on: the row and its choices, in one transaction."""
    with refusing():
        row: Model = form.save()
    return row


def remove_row(row: Model, now: datetime) -> None:
    """For nouns that nothing else depends on; what is still used is refused."""
    with refusing():
        row.delete()


def words_in(*paths: str) -> Callable[[QuerySet[Any], str], QuerySet[Any]]:
    """A search: every word typed must occur in one of these columns."""

    def matching(rows: QuerySet[Any], text: str) -> QuerySet[Any]:
        for word in text.split():
            found = Q()
            for path in paths:
                found |= Q(**{f"{path}__icontains": word})
            rows = rows.filter(found)
        return rows

    return matching


@dataclass(frozen=True, slots=True)
class Column:
    """One column of a list and one line of a detail page, with its unit.

    `about` names the page on which the column would say the same in every row, and where it is left out. `in_file` is
    False for what would cost a question to the database for each row of a download.
    """

    label: str
    show: Callable[[Any], object]
    sort: str = ""
    numeric: bool = False
    about: str = ""
    link: Callable[[Any], str] | None = None
    unit: str = ""
    in_file: bool = True

    @property
    def heading(self) -> str:
        """As it stands over a column on the screen: Volume, L."""
        return f"{self.label}, {self.unit}" if self.unit else self.label

    @property
    def csv_heading(self) -> str:
        """As it stands over a column of a file: Volume (L)."""
        return f"{self.label} ({self.unit})" if self.unit else self.label


@dataclass(frozen=True, slots=True)
class Section:
    """Rows of another noun below a detail page: the noun's key, and by which of its `within` they belong here."""

    noun: str
    within: str
    title: str = ""


@dataclass(frozen=True, slots=True)
class Noun:
    """One noun: its words, its rows, its columns, its form, and who may change it.

    `within` maps a name in the address (?reservoir=5) to the path that narrows the list by it. `parent` is the path to
    the row whose page one returns to after saving. `more` are lines that only the detail page shows.
    `only_csv` are columns that only the download has: what the others say in words, as keys and bare numbers.
    `listed` is the place on the overview, 0 for none.
    """

    key: str
    many: str
    one: str
    model: type[Model]
    form: type[PlantForm]
    columns: tuple[Column, ...]
    rows: Callable[[], QuerySet[Any]]
    search: Callable[[QuerySet[Any], str], QuerySet[Any]]
    write: Role = Role.ENGINEER
    read: Role = Role.READER
    more: tuple[Column, ...] = ()
    only_csv: tuple[Column, ...] = ()
    sections: tuple[Section, ...] = ()
    within: Mapping[str, str] = field(default_factory=dict)
    area: str = ""
    reservoir_class: str = ""
    parent: str = ""
    listed: int = 0
    intro: str = ""
    add: str = "Add"
    edit_note: str = ""
    remove_note: str = ""
    save: Save = save_form
    remove: Callable[[Any, datetime], None] | None = remove_row

    @property
    def slug(self) -> str:
        return self.many.replace(" ", "-")

    @property
    def add_words(self) -> str:
        """What the button says: Add a site, Log an event, Fit an element."""
        return f"{self.add} {self.a_one}"

    @property
    def a_one(self) -> str:
        """The noun with its article: a site, an area."""
        return f"{'an' if self.one[0] in 'aeio' else 'a'} {self.one}"

    @property
    def csv_columns(self) -> tuple[Column, ...]:
        """Everything that a row says, for a download."""
        more = [column for column in self.more if column.in_file and column.link is None]
        return (*self.columns, *self.only_csv, *more)

    @property
    def list_name(self) -> str:
        return f"register-{self.slug}"

    @property
    def name(self) -> str:
        """The name of the detail page's address; add, edit and remove follow with a suffix."""
        return f"register-{self.key}"

    @property
    def remove_role(self) -> Role:
        return max(self.write, Role.ENGINEER, key=lambda role: role.rank)

    @property
    def list_url(self) -> str:
        return reverse(self.list_name)

    def url_of(self, row: Model, page: str = "") -> str:
        return reverse(self.name + page, args=[row.pk])

    def home_of(self, row: Model) -> str:
        """Where one goes after saving: the page of what it belongs to, or its own."""
        if self.parent:
            return NOUNS[self.parent].url_of(getattr(row, self.parent))
        return self.url_of(row)


NOUNS: dict[str, Noun] = {}


def known(noun: Noun) -> Noun:
    """Enter a noun in the register."""
    NOUNS[noun.key] = noun
    return noun


def listed_nouns() -> list[Noun]:
    """The nouns of the overview, in its order."""
    return sorted((noun for noun in NOUNS.values() if noun.listed), key=lambda noun: noun.listed)


# What a row of a reservoir needs for its name and its clock.
IN_RESERVOIR = ("reservoir__machine", "reservoir__area__site")


# The key of the reservoir that a row belongs to, for files.
ITS_TAG = Column("Tag", attrgetter("reservoir.tag"))


def reservoir_page(row: Any) -> str:
    """The register's page of the reservoir that a row belongs to."""
    return NOUNS["reservoir"].url_of(row.reservoir)


def on_screen(value: object) -> str:
    """A value as a person reads it; nothing for None."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return f"{value:.10g}"
    if isinstance(value, datetime):
        return f"{value:%-d %b %Y %H:%M}"
    if isinstance(value, date):
        return f"{value:%-d %b %Y}"
    return str(value)
