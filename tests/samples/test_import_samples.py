"""`manage.py import_samples`: the same verdicts as the upload page, on a terminal."""

import io
from pathlib import Path
from typing import Any

import pytest
from django.core.management import CommandError, call_command
from pytest_django import Settings

from fleet.models import Reservoir
from samples.models import IntakeFile, Sample
from tests import builders
from tests.samples.scene import everything, lab_file

pytestmark = pytest.mark.django_db
GOOD = "PR-104;2026-05-20;07:40;Fernlab;F-1;2178;847;63;25"


@pytest.fixture
def press() -> Reservoir:
    builders.laboratory("Fernlab")
    return builders.reservoir(tag="PR-104")


@pytest.fixture
def path(tmp_path: Path, press: Reservoir) -> Path:
    made = tmp_path / "may.csv"
    made.write_bytes(lab_file(GOOD))
    return made


def run(path: Path, *options: str) -> str:
    out = io.StringIO()
    call_command("import_samples", str(path), *options, stdout=out)
    return out.getvalue()


def test_a_good_file_goes_in(path: Path) -> None:
    """AWEA RP 508, Figure A: these counts make 18/17/13."""
    told = run(path)
    assert "line 2: adds: Press 4 · drive pack, 20 May 2026, 18/17/13." in told
    assert "1 sample added." in told
    assert Sample.objects.get().intake == IntakeFile.objects.get()


def test_a_dry_run_tells_and_saves_nothing(path: Path) -> None:
    assert "1 sample would be added. Nothing was saved." in run(path, "--dry-run")
    assert not any(everything().values())


def test_the_same_file_again_is_no_failure(path: Path) -> None:
    run(path)
    assert "adds nothing again" in run(path)
    assert Sample.objects.count() == 1


def test_rows_on_record_already_are_no_failure(path: Path) -> None:
    run(path)
    path.write_bytes(lab_file(GOOD, ""))
    told = run(path)
    assert "on record already" in told
    assert "0 samples would be added" in told


def test_a_wrong_row_fails_and_saves_nothing(path: Path) -> None:
    path.write_bytes(lab_file(GOOD, GOOD.replace("2178", "dirty").replace("F-1", "F-2")))
    out = io.StringIO()
    with pytest.raises(CommandError, match="Nothing was saved"):
        call_command("import_samples", str(path), stdout=out)
    assert "line 3: wrong: ≥4 µm(c) per mL “dirty”: “dirty” is not a number." in out.getvalue()
    assert not any(everything().values())


def test_wrong_headings_fail(path: Path) -> None:
    path.write_bytes(b"Reservoir;Drawn;Water\nPR-104;2026-05-20;140\n")
    with pytest.raises(CommandError):
        run(path)


def test_a_file_that_is_not_there_fails_in_plain_words(path: Path) -> None:
    with pytest.raises(CommandError, match="cannot be read"):
        run(path.parent / "june.csv")


def test_a_file_too_large_fails_before_it_is_read(path: Path, settings: Settings) -> None:
    settings.LAB_FILE_MAX_BYTES = 10
    with pytest.raises(CommandError, match="is larger than"):
        run(path)


def test_the_site_decides_between_equal_names(path: Path) -> None:
    for name in ("North works", "South works"):
        builders.reservoir("lube sump", area=builders.area("Hall", at=builders.site(name)), tag=name[:5])
    path.write_bytes(lab_file(GOOD.replace("PR-104", "Press 4 · lube sump")))
    with pytest.raises(CommandError):
        run(path)
    run(path, "--site", "South works")
    assert Sample.objects.get().reservoir.tag == "South"


@pytest.mark.parametrize("option", [("--site", "Nowhere"), ("--laboratory", "Nobody")])
def test_an_unknown_site_or_laboratory_is_told_with_the_known_ones(path: Path, option: tuple[str, str]) -> None:
    with pytest.raises(CommandError, match=f"“{option[1]}”. Known: "):
        run(path, *option)


def test_doubts_and_what_was_left_out_are_told(path: Path, press: Reservoir) -> None:
    headings = "Reservoir;Drawn;Code;Water (mg/kg);Colour"
    rows = ["PR-104;2026-04-20;19/17/13;140;amber", "PR-104;2026-05-20;15/13/9;ND;amber"]
    path.write_bytes(lab_file(*rows, headings=headings))
    told: Any = run(path, "--dry-run")
    assert "Columns not understood, left out: Colour" in told
    assert "doubt: All counts fell by" in told
    assert "note: Water (mg/kg) “ND”" in told
