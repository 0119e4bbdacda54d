"""What was read of a row, in words. Pure."""

from collections.abc import Sequence

from samples.readings import COUNTER_SIZES, ELEMENTS, MICROSCOPE_SIZES, Reading


def figures_in_words(readings: Sequence[Reading]) -> str:
    """What was read, for people: "code, water, viscosity: 5 figures". A code counts as one figure a size."""
    kinds = list(dict.fromkeys(_kind_in_words(reading) for reading in readings))
    return f"{', '.join(kinds)}: {len(readings)} figure{'' if len(readings) == 1 else 's'}" if kinds else ""


def _kind_in_words(reading: Reading) -> str:
    if reading.measurand in (*COUNTER_SIZES, *MICROSCOPE_SIZES):
        return "code" if reading.reported_unit == "ISO 4406" else "counts"
    if reading.measurand in ELEMENTS:
        return "elements"
    return "viscosity" if reading.measurand.startswith("viscosity") else reading.measurand.replace("_", " ")
