"""Which coefficients a series of runs can carry.

Knows spans, counts and how far columns tell each other apart; does not fit.
"""

import numpy as np
from numpy.typing import NDArray

from filmfit.rates.law import Series

FloatArray = NDArray[np.float64]

LEAST_RUNS = 4
RUNS_PER_COEFFICIENT = 4  # beyond the levels
TIME_SPAN = 1.15  # longest over shortest time from which a dead time can be told
CONDITION_SPAN = 1.03
DISTINCT = 3  # values of a condition that make a dependence, not a coincidence of two days
APART = 0.3  # what must be left of a column once the others have explained it, as a share of its own spread


def carried(
    depth: FloatArray,
    own: FloatArray,
    time: FloatArray,
    segment: NDArray[np.int64],
    wear: FloatArray | None,
    conditions: dict[str, FloatArray],
    may_be_dead: bool,
) -> Series:
    """Return the series with only what its runs can carry.

    Args:
        depth: thicknesses (N,) in nm.
        own: relative standard uncertainty of each that other runs do not share (N,).
        time: exposure (N,): seconds, or passes over speed.
        segment: number of each run's segment (N,), from 0.
        wear: source energy (N,) in kWh, or None where a run has none.
        conditions: positive values (N,) by name, in order of preference.
        may_be_dead: the exposure is a time that may have a dead part.
    """
    n = depth.size
    room = (n - int(segment.max()) - 1) // RUNS_PER_COEFFICIENT
    levels = np.eye(int(segment.max()) + 1)[segment]
    columns = [levels]
    used: FloatArray | None = None
    if wear is not None and room > 0 and np.ptp(wear) > 0 and _apart(wear, columns):
        used = wear
        columns.append(wear[:, None])
        room -= 1
    dead = may_be_dead and room > 0 and time.max() / time.min() >= TIME_SPAN and _apart(1 / time, columns)
    if dead:
        columns.append(1 / time[:, None])
        room -= 1
    kept = {}
    for name, value in conditions.items():
        telling = np.unique(value).size >= (2 if name == "power_W" else DISTINCT)
        if telling and room > 0 and value.max() / value.min() >= CONDITION_SPAN and _apart(np.log(value), columns):
            kept[name] = value
            columns.append(np.log(value)[:, None])
            room -= 1
    return Series(depth, own, time, segment, used, kept, dead)


def _apart(column: FloatArray, others: list[FloatArray]) -> bool:
    """Say whether a column differs enough from what the others explain of it."""
    design = np.hstack(others)
    rest = column - design @ np.linalg.lstsq(design, column, rcond=None)[0]
    return float(rest.std()) >= APART * float(column.std()) > 0
