"""Which column of a laboratory file means what, told by its heading. Pure.

Headings are matched without regard to case, accents, punctuation and a unit in brackets or behind. Counts and water
need a unit, since laboratories differ there by 100 and 10 000; the rest have one usual unit, taken where none stands.
"""

import re
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal
from typing import Final

from samples.coding.iso4406 import Basis
from samples.problems import CellProblem
from samples.readings import COUNTER_SIZES, ELEMENTS, MICROSCOPE_SIZES, UnitError, known_unit
from samples.readings import to_canonical as _convert

COUNT_FIELDS: Final = (*COUNTER_SIZES, *MICROSCOPE_SIZES)
MEASURED_FIELDS: Final = ("water", "viscosity_40", "viscosity_100", "acid_number", "base_number", *ELEMENTS)
REQUIRED_FIELDS: Final = ("reservoir", "drawn")

_NAMES: Final[dict[str, tuple[str, ...]]] = {
    "reservoir": ("reservoir", "reservoir name", "tank", "unit name", "equipment", "oil system", "system"),
    "sample_point": ("sample point", "sampling point", "point", "sample port", "sample location"),
    "drawn": (
        *("drawn", "drawn at", "drawn on", "date drawn", "sample date", "sampled", "sampled on", "sampled at"),
        *("date sampled", "sampling date", "date of sampling", "date", "date taken", "taken"),
    ),
    "drawn_time": ("time", "time drawn", "drawn time", "sample time", "time sampled", "sampling time", "time taken"),
    "laboratory": ("laboratory", "lab", "lab name", "laboratory name"),
    "lab_number": (
        *("lab number", "lab no", "laboratory number", "laboratory no", "lab id", "lab sample number", "lab sample no"),
        *("sample number", "sample no", "sample id", "report number", "report no"),
    ),
    "machine_hours": ("machine hours", "hours on machine", "hours", "running hours", "equipment hours", "meter"),
    "oil_hours": ("oil hours", "hours on oil", "oil age", "fluid hours", "hours on fluid"),
    "litres_added": (
        *("litres added", "liters added", "oil added", "oil added since", "top up", "topped up", "makeup oil"),
        *("litres added since", "liters added since", "added", "litres added since last", "liters added since last"),
    ),
    "oil_temperature": ("oil temperature", "oil temp", "temperature", "temp", "fluid temperature"),
    "code": (
        *("code", "iso code", "iso 4406", "iso 4406 code", "code iso 4406", "cleanliness code", "iso cleanliness code"),
        *(
            "iso cleanliness",
            "iso4406",
            "iso 4406 1999",
            "iso 4406 2017",
            "iso 4406 2021",
            "cleanliness",
            "particle code",
        ),
    ),
    "count_basis": ("count basis", "counts basis", "counts per", "count unit", "counts unit", "count units", "basis"),
    "counted_ml": ("counted volume", "volume counted", "counted", "counted ml", "sample volume", "volume"),
    "water": (
        "water",
        "water content",
        "h2o",
        "moisture",
        "water kf",
        "water karl fischer",
        "kf water",
        "karl fischer",
    ),
    "viscosity_40": (
        *("viscosity 40", "visc 40", "viscosity at 40", "visc at 40", "kinematic viscosity 40", "v40", "kv40", "kv 40"),
        *("kinematic viscosity at 40", "visc40", "viscosity40"),
    ),
    "viscosity_100": (
        *("viscosity 100", "visc 100", "viscosity at 100", "visc at 100", "kinematic viscosity 100", "v100", "kv100"),
        *("kinematic viscosity at 100", "visc100", "viscosity100", "kv 100"),
    ),
    "acid_number": ("acid number", "acid no", "an", "tan", "total acid number", "neutralization number"),
    "base_number": ("base number", "base no", "bn", "tbn", "total base number"),
    "fe": ("fe", "iron"),
    "cu": ("cu", "copper"),
    "pb": ("pb", "lead"),
    "sn": ("sn", "tin"),
    "al": ("al", "aluminium", "aluminum"),
    "cr": ("cr", "chromium", "chrome"),
    "ni": ("ni", "nickel"),
    "si": ("si", "silicon"),
    "na": ("na", "sodium"),
    "k": ("k", "potassium"),
    "zn": ("zn", "zinc"),
    "p": ("p", "phosphorus"),
    "ca": ("ca", "calcium"),
    "mg": ("mg", "magnesium"),
    "remark": ("remark", "remarks", "comment", "comments", "note", "notes", "lab remark", "lab comment"),
}
FIELD_BY_NAME: Final = {name: field_ for field_, names in _NAMES.items() for name in names}
_VISCOSITY_ALONE: Final = frozenset({"viscosity", "visc", "kinematic viscosity", "kv"})

_MICRON: Final = re.compile(r"(?:µm|um|microns?|mic)\s*(?:\(?\s*(?P<kind>[cb])\s*\)|(?P<bare>[cb])\b)?")
_COUNT_WORDS: Final = re.compile(r"\b(?:particles?|counts?|counted|number|of|size|iso|cumulative|channel|no)\b")
_COUNT: Final = re.compile(r"(?P<sign>≥|>=|>|p|n)?\s*(?P<size>4|5|6|14|15)\s*(?P<micron>µ[cb]?)?")
_SIZES: Final = {"4": "p4", "6": "p6", "14": "p14", "5": "p5m", "15": "p15m"}
_BASIS: Final = re.compile(
    r"(?:[\[(]\s*)?(?:particles\s*)?(?:\bper\b|\bp/|1\s*/|/|\[|\()\s*"
    r"(?P<hundred>100)?\s*(?:ml|cm3|cc|millilit(?:re|er))\b\s*[\])]?"
)
_BRACKETED: Final = re.compile(r"[\[(]([^\[\]()]*(?:\([^()]*\))?[^\[\]()]*)[\])]")
_TRAILING_UNIT: Final = re.compile(
    r"[\s,_:-]+(?:in\s+)?(?P<unit>mg/kg|ppmw?|%(?:\s*m/m)?|wt\s*%|percent|mg/l|µg/g|ug/g|cst|mm2/s|mm\^2/s|mg\s*koh\s*/\s*g"
    r"|°\s*c|°\s*f|degc|degf|ml|l|h)\s*\Z"
)


@dataclass(frozen=True, slots=True)
class Column:
    """One understood column: its place, heading as written, the field it fills, its unit or, of counts, its basis."""

    index: int
    heading: str
    field: str
    unit: str = ""
    basis: Basis | None = None


@dataclass(frozen=True, slots=True)
class Columns:
    """``by_field`` is complete only when ``problems`` is empty; ``ignored`` are headings nobody knows, as written."""

    by_field: dict[str, Column]
    ignored: tuple[str, ...] = ()
    problems: tuple[CellProblem, ...] = ()

    @property
    def is_usable(self) -> bool:
        return not self.problems


def match_columns(headings: Sequence[str], *, line: int = 1) -> Columns:
    """Match the headings of a file to fields. Never raises.

    Problem codes: ``column_missing`` (reservoir and drawn are required), ``column_twice``, ``basis_missing`` (counts
    without "per mL" or "per 100 mL", in the heading or in a column "count basis"), ``unit_missing`` (water),
    ``unit_unknown``, ``density_missing`` (mg/L), ``temperature_missing`` (viscosity without 40 or 100 °C),
    ``result_missing`` (no column holds a result).
    """
    by_field: dict[str, Column] = {}
    ignored: list[str] = []
    problems: list[CellProblem] = []
    sizes = _bare_sizes(headings)
    for index, heading in enumerate(headings):
        column = Column(index, heading, sizes[heading]) if heading in sizes else _column(index, heading)
        if column is None:
            if heading:
                ignored.append(heading)
        elif column.field in by_field:
            problems.append(_twice(line, column, by_field[column.field]))
        else:
            by_field[column.field] = column
    problems += _missing(by_field, line)
    problems += [problem for column in by_field.values() if (problem := _unit_problem(column, by_field, line))]
    return Columns(by_field, tuple(ignored), tuple(problems))


def _bare_sizes(headings: Sequence[str]) -> dict[str, str]:
    """Headings that are a size and nothing else ("4", "6", "14"), where two or three of a kind stand together."""
    kinds = [{name for name in headings if _SIZES.get(name) in sizes} for sizes in (COUNTER_SIZES, MICROSCOPE_SIZES)]
    return {name: _SIZES[name] for names in kinds if len(names) > 1 for name in names}


def basis_of(text: str) -> Basis | None:
    """The basis that a text names ("per 100 ml", "/mL", "mL"), or None."""
    plain = _plain(text)
    match = _BASIS.search(plain) or re.fullmatch(r"(?P<hundred>100)?\s*(?:ml|cm3|cc)", plain)
    if match is None:
        return None
    return "per_100ml" if match["hundred"] else "per_ml"


def _column(index: int, heading: str) -> Column | None:
    plain = _plain(heading)
    counted = _count_column(index, heading, plain)
    if counted is not None:
        return counted
    name, unit = _split_unit(plain)
    if name in _VISCOSITY_ALONE:
        return Column(index, heading, "viscosity", unit)
    field = FIELD_BY_NAME.get(name) or FIELD_BY_NAME.get(_words(plain))
    return None if field is None else Column(index, heading, field, known_unit(unit) or unit)


def _count_column(index: int, heading: str, plain: str) -> Column | None:
    rest = _MICRON.sub(lambda match: f"µ{match['kind'] or match['bare'] or ''}", _BASIS.sub(" ", plain))
    bare = _COUNT_WORDS.sub(" ", rest)
    match = _COUNT.fullmatch(re.sub(r"[^a-z0-9µ≥>=]+", " ", bare).strip())
    if match is None or not (match["sign"] or match["micron"] or bare != rest):
        return None
    measurand = _SIZES[match["size"]]
    wrong_scale = match["micron"] == "µc" if measurand in MICROSCOPE_SIZES else match["micron"] == "µb"
    return None if wrong_scale else Column(index, heading, measurand, basis=basis_of(plain))


def _split_unit(plain: str) -> tuple[str, str]:
    """The words of a heading and its unit: "viscosity 40 °c (cst)" is viscosity 40 in cst."""
    bracketed = [inner.strip() for inner in _BRACKETED.findall(plain)]
    units = [inner for inner in bracketed if inner and _words(inner) not in {"40 c", "100 c", "40", "100"}]
    unit = units[0] if units else ""
    bare = _BRACKETED.sub(lambda match: " " if match[1].strip() == unit else f" {match[1]} ", plain)
    trailing = _TRAILING_UNIT.search(bare)
    if trailing is not None and not re.search(r"\b(?:40|100)\s*\Z", bare[: trailing.start()]):
        unit = unit or trailing["unit"]
        bare = bare[: trailing.start()]
    return _words(re.sub(r"\b(40|100)\s*(?:°\s*c|deg\s*c|c)\b", r"\1", bare)), unit


def _plain(text: str) -> str:
    spelled = text.replace("μ", "µ").replace("²", "2").replace("³", "3").replace("º", "°").replace("⩾", "≥")
    decomposed = unicodedata.normalize("NFD", spelled.casefold().replace("μ", "µ"))
    return " ".join("".join(sign for sign in decomposed if not unicodedata.combining(sign)).split())


def _words(text: str) -> str:
    return " ".join(re.sub(r"[^a-z0-9]+", " ", text).split())


def _missing(by_field: dict[str, Column], line: int) -> list[CellProblem]:
    problems = [
        CellProblem(
            line, "", "", "column_missing", f"No column is headed “{name}”. Add it, or rename the one that holds it."
        )
        for name in REQUIRED_FIELDS
        if name not in by_field
    ]
    if not by_field.keys() & {"code", *COUNT_FIELDS, *MEASURED_FIELDS, "viscosity"}:
        reason = "No column holds a result. Head one “ISO 4406”, “≥4 µm(c) per mL”, “Water (mg/kg)” or the like."
        problems.append(CellProblem(line, "", "", "result_missing", reason))
    return problems


def _twice(line: int, column: Column, first: Column) -> CellProblem:
    reason = f"“{first.heading}” and “{column.heading}” mean the same. Remove or rename one of the two columns."
    return CellProblem(line, column.heading, "", "column_twice", reason)


def _unit_problem(column: Column, by_field: dict[str, Column], line: int) -> CellProblem | None:
    code, reason = _unit_reason(column, has_basis="count_basis" in by_field)
    return CellProblem(line, column.heading, column.unit, code, reason) if code else None


def _unit_reason(column: Column, *, has_basis: bool) -> tuple[str, str]:
    heading = column.heading
    if column.field == "viscosity":
        return "temperature_missing", f"“{heading}” does not say at which temperature. Write “Viscosity 40 °C (mm²/s)”."
    if column.field in COUNT_FIELDS and column.basis is None and not has_basis:
        return "basis_missing", f"“{heading}” has no unit. Counts need theirs in the heading: “per mL” or “per 100 mL”."
    if column.field == "water" and not column.unit:
        return "unit_missing", f"“{heading}” has no unit. Write “mg/kg”, “ppm” or “%” behind it."
    if column.field in _USUAL_UNITS:
        known = column.unit == "" or column.unit in _USUAL_UNITS[column.field]
        return ("", "") if known else ("unit_unknown", f"“{heading}” needs the unit {_USUAL_UNITS[column.field][0]}.")
    if column.field in (*MEASURED_FIELDS, "oil_temperature") and column.unit:
        return _measured_unit_reason(column)
    return "", ""


def _measured_unit_reason(column: Column) -> tuple[str, str]:
    try:
        _convert(column.field, Decimal(1), column.unit)
    except UnitError as error:
        return error.code, f"“{column.heading}”: {error.sentence}"
    return "", ""


_USUAL_UNITS: Final[dict[str, tuple[str, ...]]] = {
    "litres_added": ("L", "l", "litres", "liters", "litre", "liter"),
    "machine_hours": ("h", "hours", "hrs", "hour"),
    "oil_hours": ("h", "hours", "hrs", "hour"),
    "counted_ml": ("mL", "ml"),
}
