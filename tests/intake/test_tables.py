"""Files as they come: encodings, delimiters, blank tails, and things that are no table at all."""

import io
import zipfile
from contextlib import suppress

import pytest
from hypothesis import given
from hypothesis import strategies as st

from samples.intake.tables import MOST_BYTES, MOST_ROWS, ReadError, read_table

SMALL = "Reservoir;Drawn;Öl\nPress 1;9.11.2026;45,1\n"


def refusal_of(data: bytes) -> str:
    with pytest.raises(ReadError) as refusal:
        read_table(data)
    assert str(refusal.value).endswith(".")
    return refusal.value.code


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252", "latin-1"])
def test_every_usual_encoding_gives_the_same_cells(encoding: str) -> None:
    table = read_table(SMALL.encode(encoding))
    assert table.headings == ("Reservoir", "Drawn", "Öl")
    assert table.rows[0].cells == ("Press 1", "9.11.2026", "45,1")


@pytest.mark.parametrize("delimiter", [",", ";", "\t", "|"])
def test_every_usual_delimiter_is_found(delimiter: str) -> None:
    table = read_table(f"Reservoir{delimiter}Drawn\nPress 1{delimiter}2026-11-09\n".encode())
    assert table.delimiter == delimiter
    assert table.rows[0].cells == ("Press 1", "2026-11-09")


def test_commas_in_headings_do_not_make_a_comma_file() -> None:
    table = read_table(b"Reservoir;Water, mg/kg;Fe, mg/kg;Cu, mg/kg\nPress 1;1,5;2;3\n")
    assert table.headings == ("Reservoir", "Water, mg/kg", "Fe, mg/kg", "Cu, mg/kg")


def test_quoted_cells_may_hold_delimiters_quotes_and_line_ends() -> None:
    table = read_table(b'Reservoir,Remark\n"Press, 1", "say ""hot""\nand loud"\nPress 2,ok\n')
    assert table.rows[0].cells == ("Press, 1", 'say "hot"\nand loud')
    assert [row.line for row in table.rows] == [2, 4]


def test_blank_lines_and_a_blank_tail_are_dropped_and_lines_still_count() -> None:
    table = read_table(b"\r\n\r\nReservoir;Drawn\r\n\r\n  Press 1 ; 9.11.2026\r\n;;;\r\n ; \r\n\r\n")
    assert table.heading_line == 3
    assert [(row.line, row.cells) for row in table.rows] == [(5, ("Press 1", "9.11.2026"))]


def test_a_sep_line_names_the_delimiter() -> None:
    table = read_table(b"sep=;\nReservoir;Drawn\nPress 1;9.11.2026\n")
    assert (table.heading_line, table.rows[0].line, table.delimiter) == (2, 3, ";")


def test_short_rows_are_filled_and_long_rows_keep_their_rest_apart() -> None:
    table = read_table(b"A,B,C\nx,y\nx,y,z,1,,2\n")
    assert table.rows[0].cells == ("x", "y", "")
    assert (table.rows[1].cells, table.rows[1].extra) == (("x", "y", "z"), ("1", "2"))


def test_a_spreadsheet_named_csv_is_refused() -> None:
    spreadsheet = io.BytesIO()
    with zipfile.ZipFile(spreadsheet, "w") as archive:
        archive.writestr("[Content_Types].xml", "<Types/>")
    assert refusal_of(spreadsheet.getvalue()) == "file_not_text"


@pytest.mark.parametrize(
    ("data", "code"),
    [
        (b"", "file_empty"),
        (b"\xef\xbb\xbf\r\n \r\n", "file_empty"),
        (b";;;\n;;;\n", "file_empty"),
        (b"%PDF-1.7\n%\xe2\xe3\xcf\xd3\n", "file_not_text"),
        (b"\n%PDF-1.4\n", "file_not_text"),
        (b"\x89PNG\r\n\x1a\n", "file_not_text"),
        (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "file_not_text"),
        (b"<!DOCTYPE html><html></html>", "file_not_text"),
        (b"Reservoir,Drawn\nPress\x00 1,2\n", "file_not_text"),
        (bytes(range(256)) * 4, "file_not_text"),
        (b'Reservoir,Drawn\n"Press 1,2026-11-09\nPress 2,2026-11-09\n', "quote_unclosed"),
        (b"Press 1;391;96;7\nPress 2;388;95;7\n", "heading_missing"),
        (b"1,2,3\n4,5,6\n", "heading_missing"),
        (b"Reservoir,Drawn, drawn \nPress 1,2,3\n", "heading_twice"),
        (b"Reservoir\nPress 1\n", "one_column"),
        (b"Reservoir,Drawn\n\n,,\n", "rows_missing"),
        (b"A,B\n" + b"1,2\n" * (MOST_ROWS + 1), "too_many_rows"),
        (b"A,B\n" + b"x" * MOST_BYTES, "file_too_big"),
        (b"A,B\n" + b"x" * 200_000 + b",1\n", "cell_too_long"),
    ],
)
def test_what_is_no_table_says_why(data: bytes, code: str) -> None:
    assert refusal_of(data) == code


def test_bare_sizes_are_headings_and_no_values() -> None:
    assert read_table(b"4,6,14,Water\n2178,847,63,140\n").headings == ("4", "6", "14", "Water")


def test_the_largest_number_of_rows_is_read() -> None:
    assert len(read_table(b"A,B\n" + b"1,2\n" * MOST_ROWS).rows) == MOST_ROWS


@given(st.binary(max_size=400))
def test_bytes_are_read_or_refused_but_nothing_else_is_raised(data: bytes) -> None:
    with suppress(ReadError):
        read_table(data)


@given(st.text(alphabet='ab1,;\t"\n\r ', max_size=200))
def test_text_is_read_or_refused_but_nothing_else_is_raised(text: str) -> None:
    with suppress(ReadError):
        read_table(text.encode())
