"""Readings: one measured quantity each, in its canonical unit, beside what the laboratory wrote. Pure.

Canonical units: counts in particles per mL, water and elements in mg/kg, viscosity in mm²/s, acid and base number in
mg KOH/g, oil temperature in °C. A reading has either a value or an interval (low, high], never a guess inside it.
"""

from dataclasses import dataclass
from decimal import Decimal
from typing import Final, Literal

from fleet.codes import IsoCode, ScaleNumber
from samples.coding.iso4406 import Basis, bounds_per_ml, per_ml_from
from samples.intake.numbers import Qualifier, ReadNumber

SizeScale = Literal["", "um_c", "um_b", "acftd", "microscope"]

COUNTER_SIZES: Final = ("p4", "p6", "p14")
MICROSCOPE_SIZES: Final = ("p5m", "p15m")
ELEMENTS: Final = ("fe", "cu", "pb", "sn", "al", "cr", "ni", "si", "na", "k", "zn", "p", "ca", "mg")

CANONICAL_UNITS: Final[dict[str, str]] = {
    **dict.fromkeys((*COUNTER_SIZES, *MICROSCOPE_SIZES), "1/mL"),
    **dict.fromkeys(("water", *ELEMENTS), "mg/kg"),
    **dict.fromkeys(("viscosity_40", "viscosity_100"), "mm²/s"),
    **dict.fromkeys(("acid_number", "base_number"), "mg KOH/g"),
    "oil_temperature": "°C",
}
BASIS_UNITS: Final[dict[Basis, str]] = {"per_ml": "1/mL", "per_100ml": "1/100 mL"}

BEYOND_THE_TABLE: Final = ScaleNumber(28, ">")

# What one reported unit is worth in the canonical one: reported × factor.
_FACTORS: Final[dict[str, dict[str, Decimal]]] = {
    "mg/kg": {"mg/kg": Decimal(1), "%": Decimal(10_000)},
    "mm²/s": {"mm²/s": Decimal(1)},
    "mg KOH/g": {"mg KOH/g": Decimal(1)},
    "1/mL": {"1/mL": Decimal(1), "1/100 mL": Decimal("0.01")},
    "°C": {"°C": Decimal(1)},
}
_UNIT_SPELLINGS: Final[dict[str, str]] = {
    **dict.fromkeys(("mg/kg", "mgkg", "mg kg-1", "ppm", "ppmw", "ppm(m)", "ug/g", "wppm"), "mg/kg"),
    **dict.fromkeys(("%", "% m/m", "%m/m", "wt%", "wt %", "% wt", "mass%", "mass %", "% mass", "pct", "percent"), "%"),
    **dict.fromkeys(("mg/l", "mg/dm3"), "mg/L"),
    **dict.fromkeys(("mm2/s", "mm^2/s", "cst", "centistokes"), "mm²/s"),
    **dict.fromkeys(("mg koh/g", "mgkoh/g", "mg/g koh", "mg koh / g"), "mg KOH/g"),
    **dict.fromkeys(("c", "°c", "degc", "deg c", "celsius"), "°C"),
    **dict.fromkeys(("f", "°f", "degf", "deg f", "fahrenheit"), "°F"),
    **dict.fromkeys(("1/ml", "/ml", "per ml", "p/ml", "particles/ml", "particles per ml"), "1/mL"),
    **dict.fromkeys(
        ("1/100 ml", "1/100ml", "/100 ml", "/100ml", "per 100 ml", "per 100ml", "particles/100 ml", "particles/100ml"),
        "1/100 mL",
    ),
}


class UnitError(ValueError):
    """A unit that cannot be turned into the canonical one. ``code`` is stable, ``sentence`` says what to do."""

    def __init__(self, code: str, sentence: str) -> None:
        super().__init__(sentence)
        self.code = code
        self.sentence = sentence


@dataclass(frozen=True, slots=True)
class Reading:
    """One quantity in its canonical unit: a ``value``, or an interval (``low``, ``high``] with None for an open end.

    ``qualifier`` is "<", ">" or "≥" where only a bound is known. ``counted_ml`` [mL] is the volume a count was made on.
    """

    measurand: str
    value: float | None
    low: float | None = None
    high: float | None = None
    qualifier: Qualifier = ""
    reported_text: str = ""
    reported_unit: str = ""
    size_scale: SizeScale = ""
    counted_ml: float | None = None


def known_unit(text: str) -> str | None:
    """The unit that a spelling such as "ppm", "cSt" or "mm2/s" means, or None. µ, ² and case do not matter."""
    plain = " ".join(text.casefold().replace("µ", "u").replace("μ", "u").replace("²", "2").replace("³", "3").split())
    return _UNIT_SPELLINGS.get(plain)


def to_canonical(measurand: str, value: Decimal, unit: str, *, density_kg_per_l: Decimal | None = None) -> Decimal:
    """``value`` [``unit``] in the canonical unit of ``measurand``, without rounding but for a division by density.

    1 % by mass is 10 000 mg/kg (definition). mg/L becomes mg/kg by the oil's density [kg/L] at the laboratory's
    temperature and is refused without it. °F becomes °C.

    Raises:
        UnitError: ``density_missing``, or ``unit_unknown`` for a unit this measurand does not have.

    >>> to_canonical("water", Decimal("0.1"), "%")
    Decimal('1000.0')
    """
    canonical = CANONICAL_UNITS[measurand]
    known = known_unit(unit) or unit
    factor = _FACTORS[canonical].get(known)
    if factor is not None:
        return value * factor
    if canonical == "°C" and known == "°F":
        return (value - 32) / Decimal("1.8")
    if canonical == "mg/kg" and known == "mg/L":
        return _by_density(value, density_kg_per_l)
    raise UnitError("unit_unknown", f"“{unit}” is not a unit this value can have. Use {canonical}.")


def water_percent(water_mg_kg: float) -> float:
    """Water [mg/kg] as per cent by mass [%]: 10 000 mg/kg is 1 % (definition)."""
    return water_mg_kg / 10_000


def reading_of(
    measurand: str, number: ReadNumber, unit: str = "", *, density_kg_per_l: Decimal | None = None
) -> Reading | None:
    """The reading that a number from a cell or a field makes; None when the number is missing, undetected or wrong.

    ``unit`` is the reported one; "" means the canonical one. "<5" gives (0, 5], ">100" and "≥100" are open above.

    Raises:
        UnitError: as `to_canonical`.
    """
    if number.value is None:
        return None
    reported_unit = unit or CANONICAL_UNITS[measurand]
    value = float(to_canonical(measurand, number.value, reported_unit, density_kg_per_l=density_kg_per_l))
    low, high = _interval(value, number.qualifier)
    return Reading(
        measurand=measurand,
        value=value if number.qualifier == "" else None,
        low=low,
        high=high,
        qualifier=number.qualifier,
        reported_text=number.reported,
        reported_unit=reported_unit,
    )


def readings_from_counts(
    four: ReadNumber | None,
    six: ReadNumber | None,
    fourteen: ReadNumber | None,
    *,
    basis: Basis,
    counted_ml: Decimal | None = None,
    microscope: bool = False,
) -> list[Reading]:
    """Readings of cumulative counts, sizes that were not measured left out.

    Args:
        four, six, fourteen: counts [1/mL or 1/100 mL, by ``basis``] of at least 4, 6, 14 µm(c); with ``microscope``,
            ``six`` and ``fourteen`` are 5 and 15 µm by longest dimension and ``four`` is None.
        counted_ml: volume counted [mL], kept with each reading.
    """
    scale: SizeScale = "microscope" if microscope else "um_c"
    readings = []
    for measurand, number in zip(_sizes(microscope), (four, six, fourteen), strict=True):
        if number is None or number.value is None or measurand is None:
            continue
        value = float(per_ml_from(number.value, basis))
        low, high = _interval(value, number.qualifier)
        readings.append(
            Reading(
                measurand=measurand,
                value=value if number.qualifier == "" else None,
                low=low,
                high=high,
                qualifier=number.qualifier,
                reported_text=number.reported,
                reported_unit=BASIS_UNITS[basis],
                size_scale=scale,
                counted_ml=None if counted_ml is None else float(counted_ml),
            )
        )
    return readings


def readings_from_code(code: IsoCode, *, microscope: bool | None = None) -> list[Reading]:
    """Readings of a code without counts: an interval (low, high] of particles per mL a size, never a middle value.

    ``≥7`` is open above, ``>28`` too. ``*`` (too many to count) counts as beyond the table.
    ``microscope=None``: a code that begins with a dash is read as 5 and 15 µm under the microscope (ISO 4406
    writes those so); pass False where the laboratory's counter left out 4 µm.
    """
    by_microscope = code.is_two_number if microscope is None else microscope
    scale: SizeScale = "microscope" if by_microscope else "um_c"
    readings = []
    for place, measurand in enumerate(_sizes(by_microscope)):
        size = code.sizes[place]
        if measurand is None or not size.is_measured:
            continue
        low, high = _code_interval(size)
        readings.append(
            Reading(
                measurand=measurand,
                value=None,
                low=low,
                high=high,
                qualifier=_code_qualifier(size),
                reported_text=str(size),
                reported_unit="ISO 4406",
                size_scale=scale,
            )
        )
    return readings


def _sizes(microscope: bool) -> tuple[str | None, str, str]:
    return (None, *MICROSCOPE_SIZES) if microscope else COUNTER_SIZES


def _interval(value: float, qualifier: Qualifier) -> tuple[float | None, float | None]:
    if qualifier == "":
        return None, None
    return (0.0, value) if qualifier == "<" else (value, None)


def _code_qualifier(size: ScaleNumber) -> Qualifier:
    if size.mark == "≥":
        return "≥"
    return ">" if size.mark in (">", "*") else ""


def _code_interval(size: ScaleNumber) -> tuple[float, float | None]:
    """Too many to count is beyond the table, as ``>28`` is."""
    return bounds_per_ml(BEYOND_THE_TABLE if size.number is None else size)


def _by_density(value: Decimal, density_kg_per_l: Decimal | None) -> Decimal:
    if density_kg_per_l is None or density_kg_per_l <= 0:
        raise UnitError("density_missing", "mg/L needs the oil's density. Ask for mg/kg, or give the density.")
    return value / density_kg_per_l
