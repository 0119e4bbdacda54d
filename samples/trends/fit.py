"""Learning wander, noise and spread of drifts from many stretches at once.

Empirical Bayes (Efron & Morris, J. Am. Stat. Assoc. 68 (1973) 117): the parameters that make the one-step predictions
of all stretches most likely under Student's t with 5 degrees of freedom.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.optimize import minimize

from samples.trends.arrays import FloatArray
from samples.trends.level import LevelParameters, run_filter


@dataclass(frozen=True)
class Fit:
    """Parameters with the number of one-step predictions behind them and the sum of their log densities."""

    parameters: LevelParameters
    predictions: int
    log_likelihood: float


def fit_parameters(
    times: ArrayLike, y: ArrayLike, start: LevelParameters, extra_variance: ArrayLike | None = None
) -> Fit:
    """Fit q, r and tau by Nelder-Mead on their logarithms, from scalar `start`, whose guard c is kept.

    `times` (months), `y`: shape (series, samples), NaN in y where there is no sample. Raises ValueError where no series
    has two samples.
    """
    values = np.atleast_2d(np.asarray(y, dtype=np.float64))
    predictions = int(np.maximum((~np.isnan(values)).sum(axis=1) - 1, 0).sum())
    if predictions == 0:
        raise ValueError("no series has two samples, so there is nothing to learn from")

    def loss(logs: FloatArray) -> float:
        run = run_filter(times, values, _from_logs(logs, start.c), None, extra_variance)
        return -float(run.log_likelihood_t5.sum())

    first = np.log([float(start.q), float(start.r), float(start.tau)])
    found = minimize(loss, first, method="Nelder-Mead", options={"xatol": 0.01, "fatol": 0.05, "maxiter": 400})
    return Fit(_from_logs(np.asarray(found.x, dtype=np.float64), start.c), predictions, -float(found.fun))


def _from_logs(logs: FloatArray, c: float) -> LevelParameters:
    # Far below what any laboratory resolves, so that a walk towards nought stays finite.
    q, r, tau = np.exp(np.clip(logs, -20.0, 20.0)).tolist()
    return LevelParameters(q, r, tau, c)
