"""A level that wanders slowly from run to run, under the scatter of single runs.

Knows the filter that makes such a series white; does not know what the columns mean.
"""

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


def whiten(columns: FloatArray, variance: FloatArray, wander: float) -> tuple[FloatArray, FloatArray, float]:
    """Return columns with correlated scatter taken out, what the filter says of the next run, and its variance.

    The level is a random walk that starts at zero and gains the variance `wander` from run to run.

    Args:
        columns: (N, C) in the order of the runs, the observations one of them.
        variance: of each run's own scatter (N,).
        wander: variance gained from one run to the next, >= 0.

    Returns:
        the innovations over their standard deviations (N, C) with the logarithm of these in the last column;
        the level (C,) that each column implies for the next run; the variance of that level.

    Reference: Durbin and Koopman, Time Series Analysis by State Space Methods, 2nd ed., section 2.2 (from memory);
    tests/rooms/test_rates.py compares with the full covariance matrix.
    """
    if wander == 0:
        deviation = np.sqrt(variance)
        white = np.column_stack([columns / deviation[:, None], np.log(deviation)])
        return white, np.zeros(columns.shape[1]), 0.0
    white = np.empty((columns.shape[0], columns.shape[1] + 1))
    level = np.zeros(columns.shape[1])
    spread = 0.0
    for at in range(columns.shape[0]):
        total = spread + variance[at]
        innovation = columns[at] - level
        root = np.sqrt(total)
        white[at, :-1] = innovation / root
        white[at, -1] = np.log(root)
        gain = spread / total
        level = level + gain * innovation
        spread = spread * (1 - gain) + wander
    return white, level, spread
