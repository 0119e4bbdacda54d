"""How much oil a reservoir can hold, as far as its volume on record tells."""

from typing import Final

from fleet.models import Reservoir
from fleet.refusals import RefusedError

# A tank's nominal volume leaves out pipes, coolers and cylinders; half as much again is common, more is a slip.
MOST_FILLINGS: Final = 1.5


def hold_volume(reservoir: Reservoir, litres: float | None, field: str) -> None:
    """Refuse litres [L] that the reservoir could not hold, at the named field; None is always fine."""
    if litres is None or litres <= MOST_FILLINGS * reservoir.volume_l:
        return
    raise RefusedError(
        f"{litres:.10g} L do not fit: the volume of {reservoir} is {reservoir.volume_l:.10g} L on record. "
        "Correct the litres, or the volume of the reservoir first.",
        field,
        code="litres_too_many",
    )
