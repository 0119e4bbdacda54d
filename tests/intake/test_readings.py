"""Readings in canonical units. 0.1 % by mass is 1000 mg/kg: definition."""

from decimal import Decimal

import pytest

from fleet.codes import parse_iso_code
from samples.intake.numbers import number_of, read_number
from samples.readings import (
    CANONICAL_UNITS,
    UnitError,
    known_unit,
    reading_of,
    readings_from_code,
    readings_from_counts,
    to_canonical,
    water_percent,
)


def test_per_cent_and_mg_per_kg_are_the_same_water() -> None:
    assert to_canonical("water", Decimal("0.1"), "%") == 1000
    assert to_canonical("water", Decimal(1000), "ppm") == 1000
    assert water_percent(1000) == 0.1


def test_mg_per_litre_needs_the_density() -> None:
    with pytest.raises(UnitError) as refusal:
        to_canonical("water", Decimal(87), "mg/L")
    assert refusal.value.code == "density_missing"
    assert to_canonical("water", Decimal(87), "mg/L", density_kg_per_l=Decimal("0.87")) == 100


def test_a_unit_of_another_quantity_is_refused() -> None:
    with pytest.raises(UnitError) as refusal:
        to_canonical("viscosity_40", Decimal(46), "mg/kg")
    assert refusal.value.code == "unit_unknown"


@pytest.mark.parametrize("unit", sorted(set(CANONICAL_UNITS.values())))
def test_every_canonical_unit_knows_its_own_name(unit: str) -> None:
    assert known_unit(unit) == unit


def test_a_reading_keeps_what_the_laboratory_wrote() -> None:
    reading = reading_of("water", read_number("0,014"), "%")
    assert reading is not None
    assert (reading.value, reading.reported_text, reading.reported_unit) == (140.0, "0,014", "%")


@pytest.mark.parametrize(
    ("text", "low", "high", "qualifier"), [("<5", 0.0, 5.0, "<"), (">100", 100.0, None, ">"), ("≥20", 20.0, None, "≥")]
)
def test_a_bound_becomes_an_interval(text: str, low: float, high: float | None, qualifier: str) -> None:
    reading = reading_of("fe", read_number(text))
    assert reading is not None
    assert (reading.value, reading.low, reading.high, reading.qualifier) == (None, low, high, qualifier)


@pytest.mark.parametrize("text", ["", "n/a", "ND", "rubbish", "-4"])
def test_no_number_makes_no_reading(text: str) -> None:
    assert reading_of("fe", read_number(text)) is None


def test_counts_come_out_per_ml_with_scale_and_volume() -> None:
    counts = (number_of(Decimal(39120)), None, number_of(Decimal(710)))
    readings = readings_from_counts(*counts, basis="per_100ml", counted_ml=Decimal(25))
    assert [(reading.measurand, reading.value) for reading in readings] == [("p4", 391.2), ("p14", 7.1)]
    assert {(reading.size_scale, reading.counted_ml, reading.reported_unit) for reading in readings} == {
        ("um_c", 25.0, "1/100 mL")
    }


def test_microscope_counts_are_their_own_measurands() -> None:
    counts = (None, number_of(Decimal(2000)), number_of(Decimal(60)))
    readings = readings_from_counts(*counts, basis="per_ml", microscope=True)
    assert [(reading.measurand, reading.size_scale) for reading in readings] == [
        ("p5m", "microscope"),
        ("p15m", "microscope"),
    ]


@pytest.mark.parametrize(
    ("code", "measurands"),
    [("19/17/13", ["p4", "p6", "p14"]), ("-/18/13", ["p5m", "p15m"]), ("18/-/13", ["p4", "p14"])],
)
def test_a_code_gives_an_interval_for_each_measured_size(code: str, measurands: list[str]) -> None:
    readings = readings_from_code(parse_iso_code(code))
    assert [reading.measurand for reading in readings] == measurands
    assert all(reading.value is None and reading.low is not None for reading in readings)


def test_a_counter_that_left_out_four_keeps_its_sizes() -> None:
    readings = readings_from_code(parse_iso_code("-/18/13"), microscope=False)
    assert [(reading.measurand, reading.size_scale) for reading in readings] == [("p6", "um_c"), ("p14", "um_c")]


def test_too_many_to_count_is_beyond_the_table() -> None:
    # ISO 4406, Table 1: number 28 ends at 2 500 000 per mL.
    first = readings_from_code(parse_iso_code("*/19/14"))[0]
    assert (first.low, first.high, first.qualifier, first.reported_text) == (2_500_000.0, None, ">", "*")
