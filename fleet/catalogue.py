"""The measurands that ship. A plant may change or add rows in the database; this list only fills what is missing."""

from typing import Any

# key, name, symbol, unit, kind, family, scale, offset, direction, size, low, high, decimals
_ROWS: list[tuple[Any, ...]] = [
    ("iso4406", "Cleanliness code", "ISO 4406", "", "code", "dirt", "count", 0, "up", None, None, None, 0),
    ("p4", "Particles ≥4 µm(c)", "≥4 µm(c)", "per mL", "count", "dirt", "count", 0, "up", 4, 0, 1e7, 1),
    ("p6", "Particles ≥6 µm(c)", "≥6 µm(c)", "per mL", "count", "dirt", "count", 0, "up", 6, 0, 1e7, 1),
    ("p14", "Particles ≥14 µm(c)", "≥14 µm(c)", "per mL", "count", "dirt", "count", 0, "up", 14, 0, 1e7, 1),
    ("p5m", "Particles ≥5 µm, microscope", "≥5 µm micr.", "per mL", "count", "dirt", "count", 0, "up", 5, 0, 1e7, 1),
    (
        "p15m",
        "Particles ≥15 µm, microscope",
        "≥15 µm micr.",
        "per mL",
        "count",
        "dirt",
        "count",
        0,
        "up",
        15,
        0,
        1e7,
        1,
    ),
    ("water", "Water", "Water", "mg/kg", "quantity", "water", "log", 10, "up", None, 0, 1e6, 0),
    (
        "viscosity_40",
        "Viscosity at 40 °C",
        "Visc. 40 °C",
        "mm²/s",
        "quantity",
        "ageing",
        "percent",
        0,
        "both",
        None,
        0.5,
        5000,
        1,
    ),
    (
        "viscosity_100",
        "Viscosity at 100 °C",
        "Visc. 100 °C",
        "mm²/s",
        "quantity",
        "ageing",
        "percent",
        0,
        "both",
        None,
        0.5,
        500,
        2,
    ),
    ("acid_number", "Acid number", "AN", "mg KOH/g", "quantity", "ageing", "linear", 0, "up", None, 0, 50, 2),
    ("base_number", "Base number", "BN", "mg KOH/g", "quantity", "ageing", "linear", 0, "down", None, 0, 100, 1),
    *(
        (key, name, symbol, "mg/kg", "quantity", "wear", "log", 0.5, "up", None, 0, 1e5, 0)
        for key, name, symbol in (
            ("fe", "Iron", "Fe"),
            ("cu", "Copper", "Cu"),
            ("pb", "Lead", "Pb"),
            ("sn", "Tin", "Sn"),
            ("al", "Aluminium", "Al"),
            ("cr", "Chromium", "Cr"),
            ("ni", "Nickel", "Ni"),
        )
    ),
    *(
        (key, name, symbol, "mg/kg", "quantity", "other", "log", 0.5, direction, None, 0, 1e5, 0)
        for key, name, symbol, direction in (
            ("si", "Silicon", "Si", "up"),
            ("na", "Sodium", "Na", "up"),
            ("k", "Potassium", "K", "up"),
            ("zn", "Zinc", "Zn", "both"),
            ("p", "Phosphorus", "P", "both"),
            ("ca", "Calcium", "Ca", "both"),
            ("mg", "Magnesium", "Mg", "both"),
        )
    ),
    (
        "oil_temperature",
        "Oil temperature",
        "Oil temp.",
        "°C",
        "quantity",
        "other",
        "linear",
        0,
        "up",
        None,
        -40,
        200,
        0,
    ),
]
_COLUMNS = (
    *("key", "name", "symbol", "unit", "kind", "family", "scale", "scale_offset", "direction", "size_um"),
    *("sensible_low", "sensible_high", "decimals"),
)


def load(measurands: Any) -> None:
    """Add the shipped rows that are not there yet to the given model (the live one, or a migration's)."""
    known = set(measurands.objects.values_list("key", flat=True))
    rows = [dict(zip(_COLUMNS, row, strict=True), position=10 * n) for n, row in enumerate(_ROWS, start=1)]
    measurands.objects.bulk_create([measurands(**row) for row in rows if row["key"] not in known])
