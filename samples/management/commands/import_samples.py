"""`manage.py import_samples FILE`: a lab file from the command line, with the same verdicts as the upload page."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from django.conf import settings
from django.core.management.base import BaseCommand, CommandError, CommandParser
from django.utils import timezone

from fleet.models import Site
from samples.lab_files import FileCheck, IntakeError, check_file, commit_file
from samples.lab_rows import RowState, RowVerdict
from samples.models import Laboratory


class Command(BaseCommand):
    """Exit code 0 when the file went in (or would), adds nothing new, or went in before; 1 when anything is wrong."""

    help = "Import a laboratory's file of results: every row gets a verdict, and all rows go in or none."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("file", type=Path, help="delimited text with one heading row")
        parser.add_argument("--dry-run", action="store_true", help="print the verdicts and save nothing")
        parser.add_argument("--site", help="name of the site whose reservoirs are meant")
        parser.add_argument("--laboratory", help="name of the laboratory for rows that name none")

    def handle(self, *args: Any, **options: Any) -> None:
        now = timezone.now()
        site = _named(Site, options["site"])
        laboratory = _named(Laboratory, options["laboratory"])
        check = check_file(_read(options["file"]), options["file"].name, now, site=site, laboratory=laboratory)
        for line in _lines(check):
            self.stdout.write(line)
        if check.earlier is not None:
            return
        if not check.is_good:
            raise CommandError("Nothing was saved.")
        if options["dry_run"] or not check.adds:
            self.stdout.write(f"{_samples(check.adds)} would be added. Nothing was saved.")
            return
        try:
            intake = commit_file(check, by=None, now=now)
        except IntakeError as error:
            raise CommandError(error.sentence) from error
        self.stdout.write(f"{_samples(intake.added)} added.")


def _read(path: Path) -> bytes:
    try:
        if path.stat().st_size > settings.LAB_FILE_MAX_BYTES:
            raise CommandError(f"{path} is larger than {settings.LAB_FILE_MAX_BYTES / 1024**2:g} MB. Split it.")
        return path.read_bytes()
    except OSError as error:
        raise CommandError(f"{path} cannot be read: {error.strerror}.") from error


def _named(model: Any, name: str | None) -> Any:
    if name is None:
        return None
    found = model.objects.filter(name__iexact=name).first()
    if found is None:
        known = ", ".join(model.objects.values_list("name", flat=True)) or "none is registered"
        raise CommandError(f"There is no {model._meta.verbose_name} “{name}”. Known: {known}.")
    return found


def _lines(check: FileCheck) -> list[str]:
    lines = [check.problem.sentence] if check.problem else []
    lines += [f"line {cell.line}, {cell.column or 'heading'}: {cell.reason}" for cell in check.columns]
    if check.ignored:
        lines.append(f"Columns not understood, left out: {', '.join(check.ignored)}")
    return lines + [text for row in check.rows for text in _row_lines(row)]


def _row_lines(row: RowVerdict) -> list[str]:
    if row.state == RowState.WRONG:
        return [f"line {row.line}: wrong: {_cell(cell.column, cell.value)}{cell.reason}" for cell in row.problems]
    where = f"{row.reservoir}, {row.drawn_at:%-d %b %Y}, {row.code or 'no code'}"
    lines = [f"line {row.line}: {row.state}: {where}. {row.remark}".rstrip()]
    lines += [f"line {row.line}:   doubt: {doubt.sentence} {doubt.settles}" for doubt in row.doubts]
    return lines + [f"line {row.line}:   note: {_cell(cell.column, cell.value)}{cell.reason}" for cell in row.notes]


def _samples(number: int) -> str:
    return f"{number} sample{'' if number == 1 else 's'}"


def _cell(column: str, value: str) -> str:
    said = f"{column} “{value}”" if column and value else column
    return f"{said}: " if said else ""
