"""Fernhollow Board Mill, invented: what holds oil, what it needs and who samples it. No real plant, people or
products.
"""

from dataclasses import dataclass

Code = tuple[int, int, int]

MILL = "Fernhollow Board Mill"
COUNTING_LABORATORY = "Alder Lane Oil Laboratory"
CODES_ONLY_LABORATORY = "Weirside Testing"
LABORATORIES = (COUNTING_LABORATORY, CODES_ONLY_LABORATORY)


@dataclass(frozen=True)
class PlannedFluid:
    """A fluid by its trade grade: ISO VG, kind, viscosity at 40 °C (mm²/s) and acid number (mg KOH/g) when new."""

    name: str
    viscosity: float
    acid_number: float
    viscosity_percent_a_month: float = 0.05
    acid_a_month: float = 0.007


FLUIDS: dict[str, PlannedFluid] = {
    "HM 32": PlannedFluid("HM 32", 32.0, 0.45),
    "HM 46": PlannedFluid("HM 46", 46.0, 0.45),
    "HM 68": PlannedFluid("HM 68", 68.0, 0.45),
    "HV 46": PlannedFluid("HV 46", 46.4, 0.40, viscosity_percent_a_month=-0.08),
    "CLP 220": PlannedFluid("CLP 220", 221.0, 0.60, acid_a_month=0.009),
    "CLP 320": PlannedFluid("CLP 320", 318.0, 0.62, acid_a_month=0.009),
    "Circulating 150": PlannedFluid("Circulating 150", 149.0, 0.20, acid_a_month=0.004),
    "Turbine 46": PlannedFluid("Turbine 46", 46.0, 0.06, 0.02, acid_a_month=0.0012),
    "Compressor 46": PlannedFluid("Compressor 46", 46.5, 0.10, acid_a_month=0.011),
}


@dataclass(frozen=True)
class Figures:
    """Target and limit of one measurand as highest and lowest figure; None where that side is free."""

    target_high: float
    limit_high: float
    target_low: float | None = None
    limit_low: float | None = None


@dataclass(frozen=True)
class PlannedFilter:
    """A filter position and the element fitted to it; `flow_l_min` is None for a breather."""

    position: str
    element: str
    rating_um: float
    beta: float
    beta_size_um: float
    flow_l_min: float | None


@dataclass(frozen=True)
class Profile:
    """What reservoirs of one kind have in common.

    turnover_min: minutes in which the filters see the whole volume. betas at 4, 6 and 14 µm(c). water in mg/kg, acid as
    rise over new oil in mg KOH/g, iron in mg/kg: (target, limit).
    """

    kind: str
    target: Code
    limit: Code
    filter_name: str
    element: str
    rating_um: float
    turnover_min: float
    betas: tuple[float, float, float]
    water: tuple[float, float]
    acid_rise: tuple[float, float]
    iron: tuple[float, float]
    water_usual: float
    wear: float
    point: str


_DAY = 1440.0
_FINE, _COARSE, _SETTLING = (75.0, 1000.0, 2000.0), (5.0, 20.0, 200.0), (1.5, 2.0, 5.0)
PROFILES: dict[str, Profile] = {
    "servo": Profile(
        "hydraulic", (16, 14, 11), (18, 16, 13), "Pressure line", "fine glass fibre, 5 µm", 5, 12, _FINE,
        (150, 400), (0.5, 1.0), (20, 50), 60, 0.2, "pressure line valve, pump outlet",
    ),
    "proportional": Profile(
        "hydraulic", (17, 15, 12), (19, 17, 14), "Pressure line", "glass fibre, 6 µm", 6, 15, _FINE,
        (200, 500), (0.5, 1.0), (25, 60), 80, 0.3, "return line valve before the filter",
    ),
    "hydraulic": Profile(
        "hydraulic", (18, 16, 13), (20, 18, 15), "Return line", "glass fibre, 10 µm", 10, 20, (20.0, 200.0, 1000.0),
        (200, 500), (0.5, 1.0), (30, 80), 90, 0.4, "return line valve before the filter",
    ),
    "gear_pump": Profile(
        "hydraulic", (19, 17, 14), (21, 19, 16), "Return line", "cellulose blend, 20 µm", 20, 20, _COARSE,
        (300, 600), (0.5, 1.0), (40, 100), 120, 0.5, "return line valve before the filter",
    ),
    "gearbox": Profile(
        "gearbox", (19, 17, 14), (21, 19, 16), "Lube circuit", "glass fibre, 16 µm", 16, 30, _COARSE,
        (300, 500), (0.6, 1.2), (120, 300), 110, 1.5, "lube pump outlet valve",
    ),
    "sump_gearbox": Profile(
        "gearbox", (20, 18, 15), (22, 20, 17), "Settling only", "", 0, 12 * _DAY, _SETTLING,
        (300, 500), (0.6, 1.2), (150, 300), 130, 1.8, "sight-glass adapter with pilot tube",
    ),
    "turbine": Profile(
        "turbine_lube", (17, 15, 12), (19, 17, 14), "Offline loop", "glass fibre, 6 µm", 6, 60, _FINE,
        (100, 200), (0.1, 0.3), (10, 25), 35, 0.05, "offline loop, before the filter",
    ),
    "compressor": Profile(
        "compressor", (18, 16, 13), (20, 18, 15), "Oil filter", "glass fibre, 12 µm", 12, 10, (10.0, 75.0, 1000.0),
        (300, 800), (0.6, 1.5), (30, 80), 110, 0.3, "oil line valve after the cooler",
    ),
    "lube_set": Profile(
        "paper_machine_lube", (17, 15, 12), (19, 17, 14), "Duplex supply", "glass fibre, 10 µm", 10, 30, _FINE,
        (250, 600), (0.4, 0.8), (25, 60), 110, 0.25, "supply line after the pump",
    ),
    "bearing": Profile(
        "bearing_sump", (18, 16, 13), (20, 18, 15), "Settling only", "", 0, 10 * _DAY, _SETTLING,
        (200, 500), (0.3, 0.6), (25, 60), 70, 0.2, "drain adapter with pilot tube",
    ),
}  # fmt: skip


@dataclass(frozen=True)
class PlannedReservoir:
    """One reservoir to register; `story` names what happens to it, '' for an ordinary life.

    `ease`: code steps by which it usually stays below its target. `figures`: target and limit of the other measurands,
    percent change from new for viscosity.
    """

    tag: str
    area: str
    machine: str
    name: str
    profile: Profile
    volume_l: float
    fluid: PlannedFluid
    interval_days: int
    criticality: str
    ease: float
    laboratory: str
    story: str
    figures: dict[str, Figures]
    filters: tuple[PlannedFilter, ...]

    @property
    def target(self) -> Code:
        """Cleanliness to hold, ISO 4406 numbers at 4, 6 and 14 µm(c)."""
        return self.profile.target

    @property
    def limit(self) -> Code:
        """Cleanliness at which to act now."""
        return self.profile.limit

    @property
    def flow_l_min(self) -> float:
        """Flow through what cleans the oil, L/min; a stand-in for settling where there is no filter."""
        return self.volume_l / self.profile.turnover_min

    @property
    def codes_only(self) -> bool:
        """Whether its laboratory reports code numbers without counts."""
        return self.laboratory == CODES_ONLY_LABORATORY


Row = tuple[str, str, str, float, str, int, str, float, str]
"""Machine, reservoir, profile, litres, fluid, interval in days, criticality, ease, story ('codes': the other
laboratory).
"""

AREA_TAGS = {
    "Log yard": "LY",
    "Fibre line": "FB",
    "Forming line": "FM",
    "Press hall": "PR",
    "Finishing": "FN",
    "Power house": "PW",
    "Air and water": "AW",
}
ROWS: dict[str, tuple[Row, ...]] = {
    "Log yard": (
        ("Debarker 1", "drive pack", "hydraulic", 900, "HV 46", 60, "A", 1.5, ""),
        ("Debarker 2", "drive pack", "gear_pump", 900, "HV 46", 45, "A", 1.6, "breather failed"),
        ("Chipper", "lube sump", "sump_gearbox", 120, "CLP 220", 60, "B", 1.2, "creeping up"),
        ("Chipper", "feed roll pack", "hydraulic", 450, "HV 46", 60, "B", 1.3, "breather replaced"),
        ("Log crane", "slew and lift pack", "gear_pump", 620, "HV 46", 60, "B", 1.2, ""),
        ("Log deck", "chain drive gearbox", "sump_gearbox", 65, "CLP 220", 90, "C", 1.3, "codes"),
        ("Bark conveyor", "drive gearbox", "sump_gearbox", 38, "CLP 220", 120, "C", 1.1, "codes"),
        ("Bark press", "hydraulic pack", "gear_pump", 380, "HM 46", 90, "C", 1.4, ""),
    ),
    "Fibre line": (
        ("Refiner 1", "main lube set", "lube_set", 1200, "Circulating 150", 30, "A", 1.4, ""),
        ("Refiner 2", "main lube set", "lube_set", 1200, "Circulating 150", 30, "A", 1.5, "cooler leak"),
        ("Refiner 1", "plate gap pack", "servo", 180, "HM 32", 45, "A", 1.5, ""),
        ("Refiner 2", "plate gap pack", "servo", 180, "HM 32", 45, "A", 1.7, ""),
        ("Digester", "plug screw pack", "proportional", 540, "HM 46", 60, "A", 1.3, ""),
        ("Digester", "screw gearbox", "gearbox", 160, "CLP 320", 90, "B", 1.5, ""),
        ("Chip washer", "drive gearbox", "sump_gearbox", 54, "CLP 220", 120, "C", 0.9, "codes"),
        ("Blow valve", "actuator pack", "hydraulic", 90, "HM 46", 90, "B", 1.4, ""),
        ("Stock pump 1", "bearing sump", "bearing", 12, "Turbine 46", 90, "B", 1.3, "codes"),
        ("Stock pump 2", "bearing sump", "bearing", 12, "Turbine 46", 90, "B", 1.0, "codes"),
    ),
    "Forming line": (
        ("Forming line", "main pack", "proportional", 1600, "HM 46", 45, "A", 1.2, "offline run"),
        ("Mat former", "height control pack", "servo", 160, "HM 32", 30, "A", 1.4, ""),
        ("Prepress", "belt tension pack", "proportional", 420, "HM 46", 60, "B", 1.4, ""),
        ("Prepress", "drive gearbox", "gearbox", 210, "CLP 320", 90, "B", 1.6, ""),
        ("Flying saw", "carriage pack", "servo", 140, "HM 32", 45, "A", 1.1, ""),
        ("Dryer 1", "fan bearing set", "lube_set", 300, "Circulating 150", 60, "A", 1.5, ""),
        ("Dryer 2", "fan bearing set", "lube_set", 300, "Circulating 150", 60, "A", 0.5, ""),
        ("Resin blender", "gearbox", "gearbox", 85, "CLP 220", 90, "B", 1.4, "not current"),
    ),
    "Press hall": (
        ("Hot press", "main ram reservoir", "proportional", 4200, "HM 68", 30, "A", 1.5, "bypassing element"),
        ("Hot press", "prefill reservoir", "hydraulic", 2800, "HM 68", 60, "B", 1.5, ""),
        ("Hot press", "position control pack", "servo", 260, "HM 32", 30, "A", 1.6, ""),
        ("Board stacker", "hydraulic pack", "hydraulic", 640, "HM 46", 45, "B", 1.7, "oil change"),
        ("Press loader", "hydraulic pack", "hydraulic", 720, "HM 46", 60, "A", 1.4, ""),
        ("Press unloader", "hydraulic pack", "hydraulic", 720, "HM 46", 60, "A", 0.6, ""),
        ("Heating oil pump", "bearing sump", "bearing", 9, "Turbine 46", 90, "B", 1.4, "codes"),
        ("Cooling star", "turning pack", "gear_pump", 280, "HM 46", 90, "B", 1.3, ""),
        ("Platen lift", "hydraulic pack", "gear_pump", 330, "HM 46", 90, "C", 1.5, "not current"),
    ),
    "Finishing": (
        ("Edge trimmer", "servo pack", "servo", 220, "HM 32", 30, "A", 1.7, "servo drift"),
        ("Sander 1", "hydraulic pack", "hydraulic", 360, "HM 46", 60, "B", 1.5, "thirsty"),
        ("Sander 2", "hydraulic pack", "hydraulic", 360, "HM 46", 60, "B", 1.6, "bottle in doubt"),
        ("Saw line", "infeed pack", "hydraulic", 410, "HM 46", 45, "B", 1.5, "dirty bottle"),
        ("Saw line", "scoring saw gearbox", "sump_gearbox", 22, "CLP 220", 120, "C", 1.3, ""),
        ("Strapping line", "press pack", "gear_pump", 150, "HM 46", 90, "C", 1.5, "codes"),
        ("Panel lift 1", "hydraulic pack", "gear_pump", 110, "HM 46", 120, "C", 1.6, "overdue"),
        ("Panel lift 2", "hydraulic pack", "gear_pump", 110, "HM 46", 120, "C", 1.2, ""),
        ("Lamination press", "main pack", "proportional", 980, "HM 46", 60, "B", 1.4, "no sample yet"),
    ),
    "Power house": (
        ("Turbine 1", "lube oil tank", "turbine", 5200, "Turbine 46", 30, "A", 1.4, ""),
        ("Turbine 1", "control oil pack", "servo", 340, "HM 32", 45, "A", 1.5, ""),
        ("Boiler feed pump 1", "bearing sump", "bearing", 36, "Turbine 46", 60, "A", 1.2, ""),
        ("Boiler feed pump 2", "bearing sump", "bearing", 36, "Turbine 46", 60, "A", 1.5, ""),
        ("Forced draught fan", "bearing sump", "bearing", 28, "Turbine 46", 60, "A", 0.9, "overdue"),
        ("Induced draught fan", "coupling reservoir", "hydraulic", 310, "HM 32", 60, "A", 1.4, ""),
        ("Fuel feeder", "stoker pack", "gear_pump", 240, "HM 46", 60, "B", 1.1, "worn pump"),
        ("Ash conveyor", "drive gearbox", "sump_gearbox", 30, "CLP 220", 120, "C", 1.2, "codes"),
    ),
    "Air and water": (
        ("Air compressor 1", "oil circuit", "compressor", 95, "Compressor 46", 60, "A", 1.4, ""),
        ("Air compressor 2", "oil circuit", "compressor", 95, "Compressor 46", 60, "A", 1.6, ""),
        ("Air compressor 3", "oil circuit", "compressor", 60, "Compressor 46", 60, "B", 0.7, ""),
        ("Vacuum pump 1", "gearbox", "gearbox", 45, "CLP 220", 90, "B", 1.5, ""),
        ("Vacuum pump 2", "gearbox", "gearbox", 45, "CLP 220", 90, "B", 1.5, "not current"),
        ("River pump 1", "bearing sump", "bearing", 14, "Turbine 46", 90, "B", 1.3, "codes"),
        ("River pump 2", "bearing sump", "bearing", 14, "Turbine 46", 90, "B", 1.2, "overdue"),
        ("Effluent screw", "drive gearbox", "sump_gearbox", 48, "CLP 320", 120, "C", 1.4, ""),
    ),
}


def reservoirs() -> tuple[PlannedReservoir, ...]:
    """All reservoirs of the mill in the order of their tags, such as LY-101."""
    return tuple(
        _planned(area, number, row) for area, rows in ROWS.items() for number, row in enumerate(rows, start=101)
    )


def _planned(area: str, number: int, row: Row) -> PlannedReservoir:
    machine, name, profile_key, volume, fluid, interval, criticality, ease, story = row
    profile = PROFILES[profile_key]
    return PlannedReservoir(
        tag=f"{AREA_TAGS[area]}-{number}",
        area=area,
        machine=machine,
        name=name,
        profile=profile,
        volume_l=volume,
        fluid=FLUIDS[fluid],
        interval_days=interval,
        criticality=criticality,
        ease=ease,
        laboratory=CODES_ONLY_LABORATORY if story == "codes" else COUNTING_LABORATORY,
        story="" if story == "codes" else story,
        figures=_figures(profile, FLUIDS[fluid]),
        filters=_filters(profile, volume),
    )


def _figures(profile: Profile, fluid: PlannedFluid) -> dict[str, Figures]:
    acid_target, acid_limit = (round(fluid.acid_number + rise, 2) for rise in profile.acid_rise)
    return {
        "water": Figures(*profile.water),
        "viscosity": Figures(5.0, 10.0, -5.0, -10.0),
        "acid_number": Figures(acid_target, acid_limit),
        "fe": Figures(*profile.iron),
    }


def _filters(profile: Profile, volume_l: float) -> tuple[PlannedFilter, ...]:
    breather = PlannedFilter("Breather", "desiccant, 3 µm", 3, 200.0, 3.0, None)
    if not profile.element:
        return (breather,)
    flow = round(volume_l / profile.turnover_min, 1)
    return (
        PlannedFilter(profile.filter_name, profile.element, profile.rating_um, profile.betas[1], 6.0, flow),
        breather,
    )
