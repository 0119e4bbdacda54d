"""Rows of a noun as a table: headings that sort, cells as text, the first one leading to the row's page."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from django.db.models import Model

from fleet.views.register_noun import Column, Noun, on_screen


@dataclass(frozen=True, slots=True)
class Heading:
    label: str
    numeric: bool
    url: str = ""
    order: str = ""


@dataclass(frozen=True, slots=True)
class Cell:
    label: str
    text: str
    numeric: bool
    url: str


@dataclass(frozen=True, slots=True)
class Ledger:
    """A table for templates/components/ledger.html."""

    caption: str
    headings: list[Heading]
    rows: list[list[Cell]]


def ledger_of(noun: Noun, rows: Iterable[Any], sort: str = "", here: str = "", without: str = "") -> Ledger:
    """The rows under the noun's columns. `here`: the page's address without its sort, for headings that sort.

    `without` leaves out the columns that would repeat the page's own name in every row.
    """
    columns = [column for column in noun.columns if not without or column.about != without]
    return Ledger(
        noun.many,
        [_heading(column, sort, here) for column in columns],
        [[_cell(noun, column, row, is_first=n == 0) for n, column in enumerate(columns)] for row in rows],
    )


def _heading(column: Column, sort: str, here: str) -> Heading:
    if not (column.sort and here):
        return Heading(column.heading, column.numeric)
    is_chosen = sort.removeprefix("-") == column.sort
    order = ("descending" if sort.startswith("-") else "ascending") if is_chosen else ""
    following = f"-{column.sort}" if order == "ascending" else column.sort
    joint = "" if here.endswith("?") else "&"
    return Heading(column.heading, column.numeric, f"{here}{joint}sort={following}", order)


def _cell(noun: Noun, column: Column, row: Model, *, is_first: bool) -> Cell:
    text = on_screen(column.show(row))
    if is_first:
        return Cell(column.heading, text or "not named", column.numeric, noun.url_of(row))
    return Cell(column.heading, text, column.numeric, column.link(row) if column.link else "")


def facts(noun: Noun, row: Model) -> list[Cell]:
    """What the row's own page says about it, without what is not known."""
    columns = (*noun.columns[1:], *noun.more)
    lines = [_cell(noun, column, row, is_first=False) for column in columns]
    return [line for line in lines if line.text]
