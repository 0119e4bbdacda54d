"""From the bytes of a file to rows of text. Knows delimiters, encodings and headings, not their meaning. Pure."""

import csv
import io
import re
from collections import Counter
from dataclasses import dataclass
from typing import Final

from samples.intake.numbers import read_number

MOST_ROWS: Final = 5_000
MOST_BYTES: Final = 10 * 1024 * 1024
DELIMITERS: Final = (",", ";", "\t", "|")

# Sizes in µm that a heading may be without more: such a column lacks its unit, but it is no value.
BARE_SIZES: Final = frozenset({"4", "6", "14", "5", "15"})

_FOREIGN: Final = (
    (b"%PDF-", "a PDF document"),
    (b"PK\x03\x04", "a spreadsheet or ZIP file"),
    (b"PK\x05\x06", "an empty ZIP file"),
    (b"\xd0\xcf\x11\xe0", "an old spreadsheet or document"),
    (b"\x89PNG", "a picture"),
    (b"\xff\xd8\xff", "a picture"),
    (b"GIF8", "a picture"),
    (b"\x1f\x8b", "a compressed file"),
    (b"7z\xbc\xaf", "a compressed file"),
    (b"Rar!", "a compressed file"),
    (b"{\\rtf", "a text document"),
    (b"<!doctype", "a web page"),
    (b"<html", "a web page"),
    (b"<?xml", "an XML file"),
)
_CONTROL: Final = re.compile(r"[\x00-\x08\x0b\x0e-\x1a\x1c-\x1f]")
_QUOTED: Final = re.compile(r'"[^"]*"')
_SEP_LINE: Final = re.compile(r"\s*sep=(.)\s*", re.IGNORECASE)


class ReadError(ValueError):
    """The file as a whole cannot be read. ``code`` is stable, ``sentence`` says what and what to do."""

    def __init__(self, code: str, sentence: str) -> None:
        super().__init__(sentence)
        self.code = code
        self.sentence = sentence


@dataclass(frozen=True, slots=True)
class TableRow:
    """``cells`` has one text a heading. ``extra`` holds what stood beyond the last heading and was not blank."""

    line: int
    cells: tuple[str, ...]
    extra: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Table:
    headings: tuple[str, ...]
    rows: tuple[TableRow, ...]
    heading_line: int
    delimiter: str
    encoding: str


def read_table(data: bytes) -> Table:
    """Read a delimited text file.

    UTF-8 (with or without its mark), UTF-16 with its mark, else Western Latin (Windows-1252); commas, semicolons, tabs
    or bars between cells; quoted cells; a ``sep=;`` line; blank lines anywhere. The first line with text is the heading
    row. Cells are stripped, missing cells at the end of a row are "", and every row knows its line in the file.

    Raises:
        ReadError: ``file_empty``, ``file_too_big``, ``file_not_text``, ``quote_unclosed``, ``cell_too_long``,
            ``heading_missing``, ``heading_twice``, ``one_column``, ``rows_missing``, ``too_many_rows``.
    """
    if len(data) > MOST_BYTES:
        raise ReadError(
            "file_too_big", f"The file is larger than {MOST_BYTES // 1024**2} MB. Split it and read the parts."
        )
    _refuse_foreign(data)
    text, encoding = _decode(data)
    delimiter, text, skipped = _delimiter_of(text)
    lines = _split(text, delimiter, skipped)
    if not lines:
        raise ReadError("file_empty", "The file is empty. Check that the export was finished.")
    heading_line, raw_headings = lines[0]
    headings = _checked_headings(raw_headings)
    rows = tuple(_row(line, cells, len(headings)) for line, cells in lines[1:])
    if not rows:
        raise ReadError(
            "rows_missing", "The file has headings but no rows below them. Check that the export was finished."
        )
    return Table(headings, rows, heading_line, delimiter, encoding)


def _refuse_foreign(data: bytes) -> None:
    if not data.strip(b"\xef\xbb\xbf \t\r\n\x00"):
        raise ReadError("file_empty", "The file is empty. Check that the export was finished.")
    start = data[:512].removeprefix(b"\xef\xbb\xbf").lstrip()
    for magic, what in _FOREIGN:
        if start.startswith(magic) or start.lower().startswith(magic):
            raise ReadError(
                "file_not_text", f"The file is {what}, not a table in text form. Export it as CSV and try again."
            )


def _decode(data: bytes) -> tuple[str, str]:
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        candidates: tuple[str, ...] = ("utf-16",)
    else:
        candidates = ("utf-8-sig", "cp1252", "latin-1")
    for encoding in candidates:
        try:
            text = data.decode(encoding)
        except UnicodeDecodeError:
            continue
        if _CONTROL.search(text):
            break
        return text, encoding.removesuffix("-sig")
    raise ReadError("file_not_text", "The file is not a table in text form. Export it as CSV in UTF-8 and try again.")


def _delimiter_of(text: str) -> tuple[str, str, int]:
    """The delimiter, the text without a ``sep=`` line, and how many lines that took."""
    first, _, rest = text.partition("\n")
    named = _SEP_LINE.fullmatch(first.rstrip("\r"))
    if named is not None and named[1] in DELIMITERS:
        return named[1], rest, 1
    sample = [_QUOTED.sub("", line) for line in text.splitlines() if line.strip()][:30]
    return max(DELIMITERS, key=lambda delimiter: _evenness(sample, delimiter)), text, 0


def _evenness(sample: list[str], delimiter: str) -> tuple[int, int]:
    """How many lines have as many delimiters as the heading: "Water, mg/kg;Fe, mg/kg" is not a comma file."""
    in_heading = sample[0].count(delimiter) if sample else 0
    if not in_heading:
        return 0, 0
    return sum(line.count(delimiter) == in_heading for line in sample), in_heading


def _split(text: str, delimiter: str, skipped: int) -> list[tuple[int, list[str]]]:
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter, skipinitialspace=True, strict=True)
    lines: list[tuple[int, list[str]]] = []
    first_line = skipped + 1
    try:
        for cells in reader:
            stripped = [cell.strip() for cell in cells]
            if any(stripped):
                lines.append((first_line, stripped))
            if len(lines) > MOST_ROWS + 1:
                raise ReadError(
                    "too_many_rows", f"The file has more than {MOST_ROWS:,} rows. Split it and read the parts."
                )
            first_line = skipped + reader.line_num + 1
    except csv.Error as error:
        raise _broken_line(first_line, error) from error
    return lines


def _broken_line(line: int, error: csv.Error) -> ReadError:
    if "field limit" in str(error):
        return ReadError("cell_too_long", f"Line {line} has a cell longer than any result. Check that it is a table.")
    return ReadError(
        "quote_unclosed",
        f"Line {line} has a quotation mark that does not belong there, or one that is never closed. "
        "Correct that line and try again.",
    )


def _checked_headings(raw: list[str]) -> tuple[str, ...]:
    while raw and not raw[-1]:
        raw = raw[:-1]
    named = [heading for heading in raw if heading]
    values = [heading for heading in named if read_number(heading).value is not None and heading not in BARE_SIZES]
    if 2 * len(values) >= len(named):
        raise ReadError(
            "heading_missing", "The first line holds values, not headings. Add a line that names the columns."
        )
    if len(raw) < 2:
        raise ReadError(
            "one_column", "Only one column was found. Put commas, semicolons or tabs between the columns and try again."
        )
    repeated = [heading for heading, times in Counter(_plain(heading) for heading in named).items() if times > 1]
    if repeated:
        shown = next(heading for heading in named if _plain(heading) == repeated[0])
        raise ReadError(
            "heading_twice", f"The heading “{shown}” is there twice. Rename or remove one of the two columns."
        )
    return tuple(raw)


def _plain(heading: str) -> str:
    return " ".join(heading.casefold().split())


def _row(line: int, cells: list[str], width: int) -> TableRow:
    extra = tuple(cell for cell in cells[width:] if cell)
    return TableRow(line, tuple((cells + [""] * width)[:width]), extra)
