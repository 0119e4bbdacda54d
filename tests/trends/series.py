"""Series that several tests of trends use."""

from functools import cache

import numpy as np
from statsmodels.datasets import nile as nile_data

from samples.trends.arrays import BoolArray, FloatArray


@cache
def nile() -> FloatArray:
    """Annual flow of the Nile at Aswan 1871-1970, 10^8 m³ (statsmodels' copy of Cobb 1978)."""
    return np.asarray(nile_data.load_pandas().data["volume"], dtype=np.float64)


def ragged(rng: np.random.Generator, series: int, longest: int) -> tuple[FloatArray, FloatArray, BoolArray]:
    """Random times (months) and values with a mask that leaves every row its own number of samples, gaps included."""
    times = np.sort(rng.uniform(0, 36, (series, longest)), axis=1)
    y = 10.0 + np.cumsum(rng.normal(0, 0.4, (series, longest)), axis=1)
    return times, y, rng.random((series, longest)) < rng.uniform(0.1, 1.0, (series, 1))
