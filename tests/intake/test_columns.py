"""Headings as laboratories write them."""

import pytest

from samples.intake.columns import Column, match_columns


def column(heading: str) -> Column | None:
    return next(iter(match_columns([heading]).by_field.values()), None)


def problem_codes(*headings: str) -> list[str]:
    return [problem.code for problem in match_columns(["Reservoir", "Drawn", *headings]).problems]


@pytest.mark.parametrize(
    ("heading", "field"),
    [
        *(("Reservoir", "reservoir"), ("RÉSERVOIR", "reservoir"), ("Sample-Point", "sample_point")),
        *(("Date sampled", "drawn"), ("Drawn at", "drawn"), ("Time drawn", "drawn_time"), ("Lab No.", "lab_number")),
        *(("Machine hours (h)", "machine_hours"), ("Oil hours", "oil_hours"), ("Litres added (L)", "litres_added")),
        *(("ISO 4406", "code"), ("ISO 4406:2021", "code"), ("iso_code", "code"), ("Counted volume (mL)", "counted_ml")),
        *(("Acid number", "acid_number"), ("TAN mg KOH/g", "acid_number"), ("Base Number", "base_number")),
        *(("Fe", "fe"), ("Iron (ppm)", "fe"), ("Si_ppm", "si"), ("Sn, mg/kg", "sn"), ("K", "k"), ("P (mg/kg)", "p")),
        *(("Viscosity 40 °C (mm²/s)", "viscosity_40"), ("Visc@40C (cSt)", "viscosity_40"), ("KV100", "viscosity_100")),
        *(("Viscosity (100 °C) [mm²/s]", "viscosity_100"), ("Remarks", "remark"), ("Count basis", "count_basis")),
    ],
)
def test_a_heading_finds_its_field(heading: str, field: str) -> None:
    found = column(heading)
    assert found is not None
    assert (found.field, found.heading) == (field, heading)


@pytest.mark.parametrize(
    ("heading", "field", "basis"),
    [
        ("≥4 µm(c) per mL", "p4", "per_ml"),
        (">=6 µm(c) [1/mL]", "p6", "per_ml"),
        (">14 um(c)/ml", "p14", "per_ml"),
        ("Particles ≥ 4 µm (per 100 ml)", "p4", "per_100ml"),
        ("Particle count >6µm /100mL", "p6", "per_100ml"),
        ("P14 (per mL)", "p14", "per_ml"),
        ("≥5 µm (per 100 mL)", "p5m", "per_100ml"),
        ("15 µm per mL", "p15m", "per_ml"),
    ],
)
def test_a_count_heading_gives_size_and_unit(heading: str, field: str, basis: str) -> None:
    found = column(heading)
    assert found is not None
    assert (found.field, found.basis) == (field, basis)


@pytest.mark.parametrize(
    ("heading", "unit"),
    [
        *(("Water (mg/kg)", "mg/kg"), ("Water ppm", "mg/kg"), ("Water %", "%"), ("Water, KF (%)", "%")),
        *(("Oil temp (°F)", "°F"), ("Viscosity 40 °C cSt", "mm²/s")),
    ],
)
def test_a_unit_in_the_heading_is_kept(heading: str, unit: str) -> None:
    found = column(heading)
    assert found is not None
    assert found.unit == unit


@pytest.mark.parametrize("heading", ["4", "Blah", "6 µm(b) per mL", "≥5 µm(c) per mL", "≥21 µm(c) per mL"])
def test_a_heading_that_nobody_knows_is_listed_and_ignored(heading: str) -> None:
    assert match_columns(["Reservoir", heading]).ignored == (heading,)


@pytest.mark.parametrize(
    ("headings", "codes"),
    [
        (["≥4 µm(c)"], ["basis_missing"]),
        (["≥4 µm(c)", "Count basis"], []),
        (["4", "6", "14"], ["basis_missing"] * 3),
        (["5", "15", "Count basis"], []),
        (["4", "Fe"], []),
        (["Water"], ["unit_missing"]),
        (["Water (mg/L)"], ["density_missing"]),
        (["Fe (furlongs)"], ["unit_unknown"]),
        (["Litres added (gal)", "Fe"], ["unit_unknown"]),
        (["Viscosity (cSt)"], ["temperature_missing"]),
        (["Fe", "Iron (ppm)"], ["column_twice"]),
        (["Remark"], ["result_missing"]),
        (["ISO 4406"], []),
    ],
)
def test_units_and_doubles_are_asked_for(headings: list[str], codes: list[str]) -> None:
    assert problem_codes(*headings) == codes


def test_reservoir_and_date_are_required() -> None:
    columns = match_columns(["Fe"], line=3)
    assert [(problem.line, problem.code) for problem in columns.problems] == [(3, "column_missing")] * 2
    assert not columns.is_usable
