"""The code that a page shows for a sample on record."""

import pytest

from fleet.models import Measurand
from samples.models import Result
from samples.sample_codes import code_text


def row(key: str, value: float | None = None, **more: object) -> Result:
    return Result(measurand=Measurand(key=key, kind="count"), value=value, **more)


def test_counts_give_their_code() -> None:
    # AWEA RP 508, Figure A laboratory report: 2178, 847, 63 per mL is 18/17/13.
    assert code_text([row("p4", 2178), row("p6", 847), row("p14", 63)]) == "18/17/13"


def test_fewer_than_twenty_particles_counted_are_marked() -> None:
    # ISO 4406: the example 14/12/≥7, 10 particles counted in 10 mL.
    counted = [row("p4", 100, counted_ml=10), row("p6", 30, counted_ml=10), row("p14", 1, counted_ml=10)]
    assert code_text(counted) == "14/12/≥7"


@pytest.mark.parametrize("text", ["19", "≥7", ">28", "*"])
def test_a_code_alone_comes_out_as_it_went_in(text: str) -> None:
    assert code_text([row("p14", None, low=1.0, reported_text=text, reported_unit="ISO 4406")]) == f"-/-/{text}"


def test_microscope_counts_begin_with_a_dash() -> None:
    # ISO 4406, microscope form: -/18/13.
    assert code_text([row("p5m", 2000), row("p15m", 60)]) == "-/18/13"


def test_a_bound_gives_the_number_it_proves() -> None:
    assert code_text([row("p14", None, low=100.0, qualifier=">")]) == "-/-/≥14"
    assert code_text([row("p14", None, high=4.0, low=0.0, qualifier="<")]) == "-/-/9"


def test_nothing_counted_is_no_code() -> None:
    assert code_text([]) == ""
