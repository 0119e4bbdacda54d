"""What to look at first, and the cautions that belong to it. Pure, and in our own words.

The signatures are common practice in condition monitoring; the cautions remind of what public safety notices say about
jets of oil under pressure, stored energy, hot oil and spray fires. Site procedures and trained people come first, and
nothing here asks anybody to open a line under pressure.
"""

from typing import Final

from alerts.rules import SAMPLING, Kind

FIRST_STEPS: Final[dict[str, tuple[str, ...]]] = {
    "dirt": (
        "Look at the breather, the seals and the covers, and at what was opened or topped up since the last sample.",
        "Read the filter indicator: an element that never loads while counts rise may be bypassed, torn or missing.",
        "Where iron or copper rose in the same bottle, have the machine inspected before filtering the evidence away.",
        "Filter offline or fit a finer element, and draw again to prove it.",
    ),
    "water": (
        "Compare sodium, potassium and magnesium with the sample before: they rise with cooler or process water.",
        "Without them look for condensation, steam, washdown or rain by way of breather and seals.",
        "Stop the water first; then drain the bottom or dry the oil, and draw again with the machine hot and running.",
    ),
    "ageing": (
        "Check that the right oil was filled and topped up.",
        "Compare viscosity, acid number and temperature history: ageing moves them together, another oil does not.",
        "Plan a partial or full change only when the cause is known; a change resets the trend and leaves the cause.",
    ),
    "wear": (
        "Look for company: coarse particles, noise, temperature or vibration speak for active wear.",
        "Check litres topped up: dilution hides metal, and mending a leak brings it back.",
        "Draw a repeat soon, and plan an inspection when it agrees.",
    ),
    "other": (
        "Compare with the new oil: silicon and additive metals may come from the oil itself.",
        "Draw a repeat before anything is changed.",
    ),
    SAMPLING: (
        "Draw the sample on the next round, from the planned point with the machine warm and running.",
        "If the machine is down, plan a new day, so that the gap is known.",
    ),
}

SAMPLE_CAUTION: Final = (
    "Draw only at a valve fitted for it, by people trained for it; never loosen a fitting, and keep hands and face out "
    "of the line of a jet."
)
WORK_CAUTION: Final = (
    "Isolate, lock and tag; release and block stored energy in accumulators and raised loads, and check for zero at a "
    "gauge. Never feel for a leak."
)
HOT_CAUTION: Final = "Hot oil burns: let it cool to the site's figure, and cover skin and eyes."
FIRE_CAUTION: Final = "Oil spray can catch fire at a hot surface: keep ignition away and stop the pump first."
JET_CAUTION: Final = (
    "Oil under the skin is an emergency even when it looks like a pinprick: say “injection injury”, and bring the "
    "safety data sheet."
)
CART_CAUTION: Final = (
    "A filter cart goes on suction or return only, with the right oil, hoses rated for it, and somebody near."
)
DEFER: Final = "Site procedures, local rules and licensed people come first."


def first_steps(family: str, kind: Kind) -> tuple[str, ...]:
    """What to do next, cheapest first. Before the limit there is time to plan, and the last line says so."""
    steps = FIRST_STEPS.get(family, FIRST_STEPS["other"])
    if kind in (Kind.FORECAST, Kind.OVER_TARGET):
        return (*steps, "The limit is not passed: plan it with the next stop rather than rush it.")
    return steps


def cautions(family: str, hazards: str = "", pressure_bar: float | None = None) -> tuple[str, ...]:
    """The lines that fit the work a family calls for and what is known of the reservoir; the last defers to the site.

    `hazards` is the register's free text; `pressure_bar` [bar] is the working pressure, None where not known.
    """
    told = hazards.casefold()
    lines = [SAMPLE_CAUTION]
    if family != SAMPLING:
        lines.append(WORK_CAUTION)
    if family == "dirt":
        lines.append(CART_CAUTION)
    if pressure_bar or "pressure" in told:
        lines.append(JET_CAUTION)
    if "hot" in told or family in ("water", "ageing"):
        lines.append(HOT_CAUTION)
    if "fire" in told:
        lines.append(FIRE_CAUTION)
    return (*lines, DEFER)
