"""A lab file comes in: every row gets a verdict, and then all rows go in or none."""

from __future__ import annotations

import hashlib
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta

from django.db import IntegrityError, transaction

from fleet.models import Person, Site
from samples.intake.columns import match_columns
from samples.intake.rows import read_rows
from samples.intake.tables import ReadError, read_table
from samples.lab_matching import read_names
from samples.lab_rows import RowChecker, RowState, RowVerdict
from samples.models import IntakeFile, Laboratory, PendingFile
from samples.problems import CellProblem, Problem
from samples.results import EntryError, measurands_by_key, save_checked

KEPT_FOR = timedelta(days=1)
LONGEST_NAME = 200


class IntakeError(ValueError):
    """A file that does not go in. `code` is stable, the sentence says what to do."""

    def __init__(self, code: str, sentence: str) -> None:
        super().__init__(sentence)
        self.code = code
        self.sentence = sentence


@dataclass(frozen=True)
class FileCheck:
    """What was found in a file. `problem` is about the file as a whole, `columns` about its headings."""

    name: str
    digest: str
    problem: Problem | None = None
    columns: Sequence[CellProblem] = ()
    ignored: Sequence[str] = ()
    rows: Sequence[RowVerdict] = ()
    earlier: IntakeFile | None = None

    @property
    def counts(self) -> Counter[RowState]:
        return Counter(row.state for row in self.rows)

    @property
    def adds(self) -> int:
        return self.counts[RowState.ADDS] + self.counts[RowState.IN_DOUBT]

    @property
    def wrong(self) -> int:
        return self.counts[RowState.WRONG]

    @property
    def day_first(self) -> CellProblem | None:
        """The first date that could also be read month first; the file is told once how it was read."""
        notes = (note for row in self.rows for note in row.notes)
        return next((note for note in notes if note.code == "date_day_first"), None)

    @property
    def is_good(self) -> bool:
        """Nothing in it is wrong; it may still add nothing."""
        return not (self.problem or self.columns or self.wrong)

    @property
    def can_go_in(self) -> bool:
        return self.is_good and self.adds > 0


def check_file(
    data: bytes, name: str, now: datetime, *, site: Site | None = None, laboratory: Laboratory | None = None
) -> FileCheck:
    """Read a file and judge every row; nothing is saved. `laboratory` is for rows that name none."""
    named = FileCheck(name[-LONGEST_NAME:], hashlib.sha256(data).hexdigest())
    earlier = IntakeFile.objects.filter(digest=named.digest).first()
    if earlier is not None:
        return FileCheck(named.name, named.digest, earlier=earlier, problem=_been_here(earlier))
    try:
        table = read_table(data)
    except ReadError as error:
        return FileCheck(named.name, named.digest, Problem(error.code, error.sentence))
    columns = match_columns(table.headings, line=table.heading_line)
    if not columns.is_usable:
        return FileCheck(named.name, named.digest, columns=columns.problems, ignored=columns.ignored)
    checker = RowChecker(read_names(site), columns, measurands_by_key(), laboratory, now)
    rows = checker.check(read_rows(table, columns, _latest_clock(now, site)))
    return FileCheck(named.name, named.digest, ignored=columns.ignored, rows=rows)


def commit_file(check: FileCheck, *, by: Person | None, now: datetime) -> IntakeFile:
    """Save every row of a checked file in one transaction.

    Raises IntakeError where anything is wrong or nothing new; then nothing is saved.
    """
    if check.problem is not None:
        raise IntakeError(check.problem.code, check.problem.sentence)
    if not check.is_good:
        raise IntakeError("rows_wrong", "Nothing was saved. Correct the file and choose it again.")
    checked = [row.checked for row in check.rows if row.checked is not None]
    if not checked:
        raise IntakeError("nothing_new", "Every row is on record already; there is nothing to import.")
    facts = {"name": check.name, "digest": check.digest, "rows": len(check.rows), "added": len(checked)}
    try:
        with transaction.atomic():
            intake = IntakeFile.objects.create(**facts, entered_by=by, entered_at=now)
            save_checked(checked, by=by, now=now, intake=intake)
            PendingFile.objects.filter(digest=check.digest).delete()
    except IntegrityError as error:
        raise IntakeError("in_meanwhile", "Somebody imported this file in the meantime. Nothing was added.") from error
    except EntryError as error:
        raise IntakeError(error.code, f"Nothing was saved. {error.sentence}") from error
    return intake


def keep_for_import(
    data: bytes, check: FileCheck, by: Person, now: datetime, laboratory: Laboratory | None
) -> PendingFile:
    """Hold a good file until its bringer says "import"; what others left lying for a day goes."""
    PendingFile.objects.filter(brought_at__lt=now - KEPT_FOR).delete()
    facts = {"name": check.name, "data": data, "laboratory": laboratory, "brought_at": now}
    return PendingFile.objects.update_or_create(brought_by=by, digest=check.digest, defaults=facts)[0]


def _been_here(earlier: IntakeFile) -> Problem:
    who = f" by {earlier.entered_by}" if earlier.entered_by else ""
    added = f"{earlier.added} sample{'' if earlier.added == 1 else 's'}"
    said = f"This file went in on {earlier.entered_at:%-d %b %Y}{who} and added {added}. It adds nothing again."
    return Problem("file_known", said)


def _latest_clock(now: datetime, site: Site | None) -> datetime:
    """The furthest clock of the sites: each row is held against its own site's once that is known."""
    zones = [site.zone] if site else [one.zone for one in Site.objects.all()]
    return max(
        (now.astimezone(zone).replace(tzinfo=None) for zone in zones), default=now.astimezone(UTC).replace(tzinfo=None)
    )
