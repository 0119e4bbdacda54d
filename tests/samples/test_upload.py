"""A lab file comes in: every row's verdict, then all of it or nothing, and never twice."""

from datetime import UTC, date, datetime, timedelta
from typing import Any

import pytest
from django.core.files.uploadedfile import SimpleUploadedFile
from django.test import Client
from django.urls import reverse
from django.utils import timezone
from pytest_django import Settings

from fleet.models import Reservoir, ReservoirAlias, Role, Standing
from samples.lab_rows import RowState
from samples.models import IntakeFile, PendingFile, Result, Sample
from tests import builders
from tests.samples.scene import client_as, errors_of, everything, lab_file, published_sets

pytestmark = pytest.mark.django_db
UPLOAD = "/samples/upload/"
GOOD = "PR-104;2026-05-20;07:40;Fernlab;F-1;2178;847;63;25"


@pytest.fixture
def press() -> Reservoir:
    builders.laboratory("Fernlab")
    return builders.reservoir(tag="PR-104")


@pytest.fixture
def client(press: Reservoir) -> Client:
    return client_as(Role.TECHNICIAN)


def choose(client: Client, data: bytes, name: str = "may.csv", **more: str) -> Any:
    return client.post(UPLOAD, {"file": SimpleUploadedFile(name, data)} | more)


def go_in(client: Client, data: bytes) -> Any:
    """Check, then import."""
    pending = choose(client, data).context["pending"]
    return client.post(UPLOAD, {"pending": pending.pk}, follow=True)


def reasons(response: Any) -> list[str]:
    return [cell.reason for row in response.context["check"].rows for cell in row.problems]


def test_a_reader_may_not_upload(press: Reservoir) -> None:
    assert choose(client_as(Role.READER), lab_file(GOOD)).status_code == 403


def test_checking_shows_the_verdict_and_saves_no_sample(client: Client) -> None:
    response = choose(client, lab_file(GOOD))
    assert [row.state for row in response.context["check"].rows] == [RowState.ADDS]
    assert "1 of 1 row adds a sample" in " ".join(response.content.decode().replace("</strong>", "").split())
    assert not Sample.objects.exists()


def test_importing_saves_every_row_with_its_file(client: Client, press: Reservoir) -> None:
    response = go_in(client, lab_file(GOOD, "PR-104;2026-05-28;07:40;Fernlab;F-2;2200;850;64;25"))
    assert "2 samples added from may.csv." in response.content.decode()
    intake = IntakeFile.objects.get()
    assert (intake.rows, intake.added, intake.samples.count()) == (2, 2, 2)
    assert Standing.objects.get(reservoir=press).wanted_at is not None
    assert not PendingFile.objects.exists()


def test_published_counts_come_out_with_their_published_codes(client: Client) -> None:
    sets = published_sets()
    rows = [
        f"PR-104;2026-05-{day};07:40;;;{one['four']};{one['six']};{one['fourteen']};{one['counted_ml']}"
        for day, one in enumerate(sets, start=10)
    ]
    go_in(client, lab_file(*rows))
    for sample, one in zip(Sample.objects.order_by("drawn_at"), sets, strict=True):
        page = client.get(reverse("sample", args=[sample.pk])).content.decode()
        assert f'<p class="big-code">{one["expected"]}</p>' in page, one["source"]


def test_latin_letters_semicolons_and_decimal_commas_are_read(client: Client) -> None:
    data = "Reservoir;Drawn;≥4 µm(c) per mL;Water (mg/kg);Viscosity 40 °C\nPR-104;20.05.2026;391,2;140,5;45,1\n"
    go_in(client, data.replace("≥", ">=").encode("latin-1"))
    assert set(Result.objects.values_list("value", flat=True)) == {45.1, 140.5, 391.2}


def test_the_same_file_twice_adds_nothing_and_says_when_it_went_in(client: Client) -> None:
    go_in(client, lab_file(GOOD))
    before = everything()
    assert "This file went in on" in errors_of(choose(client, lab_file(GOOD)))["file"]
    assert everything() == before


def test_the_same_row_in_another_file_adds_nothing(client: Client) -> None:
    go_in(client, lab_file(GOOD))
    response = choose(client, lab_file(GOOD, "", ""))
    assert [row.state for row in response.context["check"].rows] == [RowState.ON_RECORD]
    assert response.context["pending"] is None


def test_the_same_row_twice_in_one_file_counts_once(client: Client) -> None:
    response = choose(client, lab_file(GOOD, GOOD))
    assert [row.state for row in response.context["check"].rows] == [RowState.ADDS, RowState.ON_RECORD]
    assert "line 2 of this file" in response.context["check"].rows[1].remark


def test_another_figure_for_the_same_bottle_is_refused_and_named(client: Client) -> None:
    go_in(client, lab_file(GOOD))
    told = reasons(choose(client, lab_file(GOOD.replace("2178", "2187"))))
    assert "2187 1/mL here, 2178 1/mL on record" in told[0]


def test_a_row_without_time_meets_the_sample_of_that_day(client: Client, press: Reservoir) -> None:
    drawn = datetime(2026, 5, 20, 7, 40, tzinfo=UTC)
    builders.sample(press, drawn, {"p4": 2178.0, "p6": 847.0, "p14": 63.0})
    response = choose(client, lab_file("PR-104;2026-05-20;;;;2178;847;63;"))
    assert [row.state for row in response.context["check"].rows] == [RowState.ON_RECORD]


def test_two_numbers_of_one_day_are_two_bottles_to_be_looked_at(client: Client) -> None:
    go_in(client, lab_file(GOOD))
    response = choose(client, lab_file("PR-104;2026-05-20;;Fernlab;F-2;2200;850;64;25"))
    assert [row.state for row in response.context["check"].rows] == [RowState.IN_DOUBT]


def test_one_wrong_row_keeps_all_out(client: Client) -> None:
    response = choose(client, lab_file(GOOD, "NO-1;2026-05-20;;;;2178;847;63;25"))
    assert response.status_code == 422
    assert response.context["pending"] is None
    assert not any(everything().values())


@pytest.mark.parametrize(
    ("row", "sentence"),
    [
        ("NO-1;2026-05-20;;;;2178;847;63;25", "No reservoir is called “NO-1”"),
        (";2026-05-20;;;;2178;847;63;25", "names no reservoir"),
        ("PR-104;2099-05-20;;;;2178;847;63;25", "after today"),
        ("PR-104;2099-05-20;;Otherlab;;2178;847;63;25", "No laboratory is called “Otherlab”"),
        ("PR-104;yesterday;;;;2178;847;63;25", "is not a date"),
        ("PR-104;;;;;2178;847;63;25", "has no date"),
        ("PR-104;2026-05-20;;;;63;847;2178;25", "higher than that of the smaller one"),
        ("PR-104;2026-05-20;;;;-2178;847;63;25", "below zero"),
        ("PR-104;2026-05-20;;;;dirty;847;63;25", "is not a number"),
        ("PR-104;2026-05-20;;;;9e9;847;63;25", "cannot be"),
        ("PR-104;2026-05-20;;Otherlab;;2178;847;63;25", "No laboratory is called “Otherlab”"),
        (f"PR-104;2026-05-20;;;{'9' * 61};2178;847;63;25", "at most 60 characters"),
        ("PR-104;2026-05-20;;;;;;;25", "has no result"),
        ("PR-104;2026-05-20;;;;2178;847;63;25;77", "more cells than there are headings"),
    ],
)
def test_a_wrong_row_is_told_with_line_and_reason(client: Client, row: str, sentence: str) -> None:
    response = choose(client, lab_file(GOOD, row))
    assert any(sentence in reason for reason in reasons(response))
    assert {cell.line for one in response.context["check"].rows for cell in one.problems} == {3}
    assert not any(everything().values())


@pytest.mark.parametrize(
    ("data", "sentence"),
    [
        (b"", "The file is empty"),
        (b"\xef\xbb\xbf\r\n", "The file is empty"),
        (b"%PDF-1.7 \x00\x01", "PDF document"),
        (b"PK\x03\x04sheet", "spreadsheet or ZIP"),
        (b"\x00\x01\x02\x03", "not a table in text form"),
        (b"PR-104;2026-05-20;2178;847;63\n", "holds values, not headings"),
        (b"Reservoir;Drawn;Water (mg/kg)\n", "no rows below"),
        (b"Reservoir\nPR-104\n", "Only one column"),
        (b'Reservoir;Drawn;"Water (mg/kg)\nPR-104;2026-05-20;1\n', "quotation mark"),
    ],
)
def test_what_is_no_lab_file_is_told_so(client: Client, data: bytes, sentence: str) -> None:
    response = choose(client, data)
    assert sentence in errors_of(response)["file"]
    assert not any(everything().values())


def test_headings_without_a_unit_are_told_so(client: Client) -> None:
    response = choose(client, b"Reservoir;Drawn;Water;>=4 um(c)\nPR-104;2026-05-20;140;2178\n")
    codes = {cell.code for cell in response.context["check"].columns}
    assert codes == {"unit_missing", "basis_missing"}
    assert "has no unit" in response.content.decode()


def test_no_file_at_all_is_told_so(client: Client) -> None:
    assert "Choose the file" in errors_of(client.post(UPLOAD, {}))["file"]


def test_fifty_megabytes_are_refused_without_being_kept(client: Client) -> None:
    response = choose(client, b"x" * 50 * 1024 * 1024)
    assert "larger than 5 MB" in errors_of(response)["file"]
    assert not any(everything().values())


def test_the_largest_file_that_is_allowed_is_read(client: Client, settings: Settings) -> None:
    data = lab_file(GOOD)
    settings.LAB_FILE_MAX_BYTES = len(data)
    assert choose(client, data).context["check"].is_good
    assert "larger than" in errors_of(choose(client, data + b"\n"))["file"]


def test_a_forged_form_is_refused(press: Reservoir) -> None:
    client = Client(enforce_csrf_checks=True)
    client.force_login(builders.person(Role.TECHNICIAN))
    assert choose(client, lab_file(GOOD)).status_code == 403


def test_another_name_counts_only_in_its_span_of_days(client: Client, press: Reservoir) -> None:
    spans = {"valid_from": date(2026, 1, 1), "valid_to": date(2026, 5, 1)}
    ReservoirAlias.objects.create(reservoir=press, name="UNIT 7 HYD", **spans)
    good = choose(client, lab_file("unit 7  hyd;2026-04-30;;;;2178;847;63;25"))
    late = choose(client, lab_file("UNIT 7 HYD;2026-05-01;;;;2178;847;63;25"))
    assert good.context["check"].is_good
    assert "but not on 1 May 2026" in reasons(late)[0]


def test_machine_and_reservoir_together_are_a_name(client: Client) -> None:
    assert choose(client, lab_file("press 4 · drive pack;2026-05-20;;;;2178;847;63;25")).context["check"].is_good


def test_a_name_that_two_reservoirs_carry_is_never_guessed(client: Client, press: Reservoir) -> None:
    for tank in (press, builders.reservoir("cooler pack", tag="PR-105")):
        ReservoirAlias.objects.create(reservoir=tank, name="HYD 4")
    told = reasons(choose(client, lab_file("HYD 4;2026-05-20;;;;2178;847;63;25")))
    assert told == ["“HYD 4” can be any of PR-104, PR-105. Write the tag."]


def test_a_sample_point_is_matched_by_name_and_never_guessed(client: Client, press: Reservoir) -> None:
    second = press.points.create(name="SP-2")
    rows = ["PR-104;sp-2;2026-05-20;140", "PR-104;SP-9;2026-05-20;140"]
    response = choose(client, lab_file(*rows, headings="Reservoir;Sample point;Drawn;Water (mg/kg)"))
    good, wrong = response.context["check"].rows
    assert good.checked.entry.point == second
    assert "Known: SP-1, SP-2" in wrong.problems[0].reason


def test_rows_of_the_file_are_history_for_the_rows_after_them(client: Client) -> None:
    rows = [f"PR-104;2026-0{month}-10;07:40;;;{2178 + month};{847 + month};{63 + month};25" for month in (4, 2, 3)]
    jump = "PR-104;2026-05-20;07:40;;;217800;84700;6300;25"
    response = choose(client, lab_file(jump, *rows))
    states = [row.state for row in response.context["check"].rows]
    assert states == [RowState.IN_DOUBT, RowState.ADDS, RowState.ADDS, RowState.ADDS]
    assert "1 goes in as in doubt" in " ".join(response.content.decode().split())


def test_a_doubtful_row_goes_in_as_in_doubt_with_its_doubt(client: Client, press: Reservoir) -> None:
    builders.sample(press, datetime(2026, 4, 20, tzinfo=UTC), {"p4": 2178.0, "p6": 847.0, "p14": 63.0})
    go_in(client, lab_file("PR-104;2026-05-20;;;;217800;84700;6300;25"))
    sample = Sample.objects.latest("drawn_at")
    assert sample.verdict == Sample.Verdict.IN_DOUBT
    assert [doubt.code for doubt in sample.doubts.all()] == ["counts_shifted_hundredfold"]


def test_a_laboratory_number_of_another_reservoir_is_refused(client: Client) -> None:
    builders.reservoir("cooler pack", tag="PR-105")
    told = reasons(choose(client, lab_file(GOOD, GOOD.replace("PR-104", "PR-105"))))
    assert "on record for Press 4 · drive pack" in told[0]


def test_the_chosen_laboratory_is_for_rows_that_name_none(client: Client) -> None:
    chosen = builders.laboratory("Otherlab", counted_ml=10)
    data = lab_file("PR-104;2026-05-10;;;;100;30;1.0;", GOOD)
    pending = choose(client, data, laboratory=str(chosen.pk)).context["pending"]
    client.post(UPLOAD, {"pending": pending.pk})
    assert sorted(Sample.objects.values_list("laboratory__name", flat=True)) == ["Fernlab", "Otherlab"]
    assert set(Result.objects.values_list("counted_ml", flat=True)) == {10.0, 25.0}


def test_only_the_one_who_brought_a_file_can_import_it(client: Client) -> None:
    pending = choose(client, lab_file(GOOD)).context["pending"]
    response = client_as().post(UPLOAD, {"pending": pending.pk}, follow=True)
    assert "no longer waiting" in response.content.decode()
    assert not Sample.objects.exists()


def test_pressing_import_twice_adds_nothing_more(client: Client) -> None:
    pending = choose(client, lab_file(GOOD)).context["pending"]
    for _ in range(2):
        client.post(UPLOAD, {"pending": pending.pk})
    assert Sample.objects.count() == 1


def test_a_file_that_the_record_overtook_is_checked_again(client: Client, press: Reservoir) -> None:
    pending = choose(client, lab_file(GOOD)).context["pending"]
    builders.sample(press, datetime(2026, 5, 20, 7, 40, tzinfo=UTC), {"p4": 9.0})
    response = client.post(UPLOAD, {"pending": pending.pk})
    assert response.status_code == 422
    assert Sample.objects.count() == 1


def test_files_left_lying_for_a_day_are_swept(client: Client) -> None:
    choose(client, lab_file(GOOD))
    PendingFile.objects.update(brought_at=timezone.now() - timedelta(days=2))
    choose(client, lab_file(GOOD, ""))
    assert PendingFile.objects.count() == 1


def test_an_imported_file_leads_to_its_own_samples(client: Client, press: Reservoir) -> None:
    builders.sample(press, datetime(2026, 4, 20, tzinfo=UTC), {"p4": 2178.0, "p6": 847.0, "p14": 63.0})
    response = go_in(client, lab_file("PR-104;2026-05-20;;;;217800;84700;6300;25"))
    intake = IntakeFile.objects.get()
    assert response.redirect_chain == [(f"/samples/?intake={intake.pk}", 302)]
    assert [sample.intake for sample, _ in response.context["rows"]] == [intake]
    assert (
        f'<a href="/samples/?intake={intake.pk}&amp;verdict=in_doubt">1 in doubt</a> waits' in response.content.decode()
    )


def test_a_date_that_could_be_either_is_told_at_the_row_and_once_for_the_file(client: Client) -> None:
    page = choose(client, lab_file("PR-104;03/04/2026;;;;2178;847;63;25")).content.decode()
    assert page.count("Read as 3 Apr 2026, the day first.") == 2
    assert "Dates were read with the day first" in page


def test_what_was_read_of_a_row_is_shown_before_it_goes_in(client: Client) -> None:
    headings = "Reservoir;Drawn;ISO 4406;Water (mg/kg);Viscosity 40 °C"
    response = choose(client, lab_file("PR-104;2026-05-20;18/17/13;140;45", headings=headings))
    assert "code, water, viscosity: 5 figures" in response.content.decode()


def test_bare_sizes_for_headings_are_asked_for_their_unit(client: Client) -> None:
    response = choose(client, b"4,6,14,Water\n2178,847,63,140\n")
    told = [cell.reason for cell in response.context["check"].columns]
    assert any("Counts need theirs in the heading" in reason for reason in told)


def test_a_file_is_never_said_to_be_kept(client: Client) -> None:
    page = choose(client, b"").content.decode()
    assert "1 thing to mend." in page
    assert "is kept" not in page


def test_one_wrong_row_is_told_in_the_singular(client: Client) -> None:
    page = " ".join(choose(client, lab_file("NO-1;2026-05-20;;;;2178;847;63;25")).content.decode().split())
    assert "1 of 1 row is wrong, so nothing was saved.</strong> Correct it and" in page


def test_a_row_for_a_reservoir_out_of_service_is_refused(client: Client) -> None:
    Reservoir.objects.update(retired_on=date(2026, 5, 1))
    response = choose(client, lab_file(GOOD))
    assert response.status_code == 422
    assert "was taken out of service on 1 May 2026" in response.content.decode()
