"""Whatever is sent to the log form and as a lab file: an answer, never a crash, and never half a sample."""

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import pytest
from django.core.files.uploadedfile import SimpleUploadedFile
from django.db import transaction
from django.test import Client
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fleet.models import Reservoir, Role
from samples.models import Result, Sample
from tests import builders
from tests.samples.scene import HEADINGS, client_as, typed

pytestmark = pytest.mark.django_db
QUIET = [HealthCheck.too_slow, HealthCheck.function_scoped_fixture]
CALM = settings(max_examples=80, deadline=None, suppress_health_check=QUIET)
PIECES = st.sampled_from(
    [
        *(
            "",
            "0",
            "-1",
            "1e400",
            "nan",
            "∞",
            "<5",
            ">1e9",
            "≥",
            "19/17/13",
            "37/1/1",
            "*/19/14",
            "-/18/13",
            "٣",
            "1,300",
        ),
        *(
            "3000 500 7 per mL",
            "3000 500 7 /100 ml",
            "2026-05-20",
            "0001-01-01",
            "9999-12-31",
            "25:61",
            "00:00",
            "\x00",
        ),
        *(
            "per_ml",
            "per_100ml",
            "%",
            "mg/kg",
            "on",
            "yes",
            "PR-104",
            "SP-1",
            "9" * 70,
            "=cmd()",
            "'; drop table",
            "\ud7ff",
        ),
    ]
)
ANYTHING = st.one_of(PIECES, st.text(max_size=30), st.floats(width=32).map(str), st.integers().map(str))
FIELDS = (
    *("reservoir", "point", "drawn_on", "drawn_time", "oil_temperature_c", "running", "method", "reason", "paste"),
    *(
        "machine_hours",
        "litres_added",
        "laboratory",
        "lab_number",
        "label_code",
        "p4",
        "p6",
        "p14",
        "basis",
        "counted_ml",
    ),
    *("microscope", "water", "water_unit", "viscosity_40", "acid_number", "fe", "zn", "remark", "then", "oil_hours"),
)
CELLS = ANYTHING.map(lambda text: text.replace("\n", " ").replace(";", ",").replace("\r", " "))


@pytest.fixture
def press() -> Reservoir:
    builders.laboratory("Fernlab")
    return builders.reservoir(tag="PR-104")


@pytest.fixture
def client(press: Reservoir) -> Client:
    return client_as(Role.TECHNICIAN)


@contextmanager
def undone() -> Iterator[None]:
    """One example: whatever it saves is whole, and is taken back afterwards."""
    with transaction.atomic():
        yield
        assert Sample.objects.count() == Result.objects.values("sample").distinct().count()
        transaction.set_rollback(True)


@CALM
@given(told=st.dictionaries(st.sampled_from(FIELDS), ANYTHING, max_size=8))
def test_the_log_form_answers_anything(client: Client, press: Reservoir, told: dict[str, str]) -> None:
    with undone():
        for address in ("/log/", "/log/preview/"):
            assert client.post(address, typed(press, paste="19/17/13") | told).status_code < 500


def bring(client: Client, data: bytes) -> None:
    with undone():
        response: Any = client.post("/samples/upload/", {"file": SimpleUploadedFile("x.csv", data)})
        assert response.status_code < 500
        pending = response.context and response.context.get("pending")
        if pending:
            assert client.post("/samples/upload/", {"pending": pending.pk}).status_code < 500


@CALM
@given(rows=st.lists(st.lists(CELLS, min_size=2, max_size=9), max_size=4), good=st.booleans())
def test_a_file_of_any_cells_is_answered(client: Client, rows: list[list[str]], good: bool) -> None:
    told = ["PR-104;2026-05-20;07:40;Fernlab;F-1;2178;847;63;25"] if good else []
    lines = [HEADINGS, *told, *(";".join(row) for row in rows)]
    bring(client, "\n".join(lines).encode("utf-8", "surrogatepass"))


@CALM
@given(cells=st.lists(CELLS, min_size=7, max_size=7))
def test_a_row_of_a_known_reservoir_with_any_cells_is_answered(client: Client, cells: list[str]) -> None:
    bring(client, "\n".join([HEADINGS, ";".join(["PR-104", "2026-05-20", *cells])]).encode("utf-8", "surrogatepass"))


@CALM
@given(data=st.binary(max_size=300))
def test_a_file_of_any_bytes_is_answered(client: Client, data: bytes) -> None:
    bring(client, data)


@CALM
@given(
    asked=st.dictionaries(st.sampled_from(["q", "reservoir", "verdict", "area", "since", "until", "page"]), ANYTHING)
)
def test_the_searches_answer_anything(client: Client, asked: dict[str, str]) -> None:
    for address in ("/log/", "/log/find/", "/samples/"):
        assert client.get(address, asked).status_code < 500
