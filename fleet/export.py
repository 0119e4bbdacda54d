"""Rows as CSV for a spreadsheet: streamed, in UTF-8, and with nothing that a spreadsheet would run as a formula."""

import csv
import math
from collections.abc import Iterable, Iterator
from datetime import date, datetime

from django.http import StreamingHttpResponse

# Also the full-width forms, which a spreadsheet may read as the plain ones.
FORMULA_STARTS = (
    "=",
    "+",
    "-",
    "@",
    "\N{FULLWIDTH EQUALS SIGN}",
    "\N{FULLWIDTH PLUS SIGN}",
    "\N{FULLWIDTH HYPHEN-MINUS}",
    "\N{FULLWIDTH COMMERCIAL AT}",
)
BYTE_ORDER_MARK = "\N{BOM}"


class _Echo:
    """A file that hands back what is written to it."""

    def write(self, line: str) -> str:
        return line


def is_plain_number(text: str) -> bool:
    """Whether a spreadsheet reads it as a number and nothing else: -0.5, +3, 1e3, also with a decimal comma."""
    try:
        return math.isfinite(float(text.strip().replace(",", ".", 1)))
    except ValueError:
        return False


def csv_cell(value: object) -> str:
    """One cell. Text that begins like a formula gets a leading apostrophe, plain numbers do not.

    >>> csv_cell("=1+1"), csv_cell("-0.5"), csv_cell("-/18/13"), csv_cell(None)
    ("'=1+1", '-0.5', "'-/18/13", '')
    """
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, datetime):
        return value.isoformat(timespec="minutes")
    if isinstance(value, date):
        return value.isoformat()
    text = str(value)
    return f"'{text}" if text.lstrip().startswith(FORMULA_STARTS) and not is_plain_number(text) else text


def csv_response(name: str, headings: Iterable[str], rows: Iterable[Iterable[object]]) -> StreamingHttpResponse:
    """A download `name`.csv, sent row by row; `rows` may be a generator over a queryset's iterator."""
    writer = csv.writer(_Echo())

    def lines() -> Iterator[str]:
        yield BYTE_ORDER_MARK + writer.writerow([csv_cell(heading) for heading in headings])
        for row in rows:
            yield writer.writerow([csv_cell(value) for value in row])

    return StreamingHttpResponse(
        lines(),
        content_type="text/csv; charset=utf-8",
        headers={"Content-Disposition": f'attachment; filename="{name}.csv"'},
    )
