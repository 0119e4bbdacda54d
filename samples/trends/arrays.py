"""The array types and the month that every trend module shares."""

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
IntArray = NDArray[np.int64]

DAYS_PER_MONTH = 30.4375
"""A twelfth of the mean Julian year of 365.25 days."""
