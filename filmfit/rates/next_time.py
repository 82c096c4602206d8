"""The time of the next run for a wanted thickness, from a rate law.

Knows one law; does not know which runs it rests on, nor what is recorded.
"""

from dataclasses import dataclass

import numpy as np
from scipy.special import stdtr

from filmfit.rates.law import Law
from filmfit.result import COVERAGE_FACTOR, Quantity


@dataclass(frozen=True)
class NextTime:
    """Exposure (s, or min/m in line) and thickness of the next run with 95 % prediction intervals.

    `keep`: the last exposure cannot be told from the best one, and stands. `within` is the chance to land near.
    """

    exposure: Quantity
    thickness_nm: Quantity
    within: float
    keep: bool


def next_time(
    law: Law, thickness_nm: float, wear: float | None, conditions: dict[str, float], common: float,
    within_percent: float, last: float | None, extra: tuple[float, float] = (0.0, 0.0),
) -> NextTime:  # fmt: skip
    """Return the exposure that should give a thickness.

    Args:
        law: of the runs.
        thickness_nm: wanted.
        wear: source energy of the next run in kWh.
        conditions: of the next run, by name.
        common: relative standard uncertainty that all thicknesses share.
        within_percent: what counts as near.
        last: the last run's exposure where it may be kept.
        extra: ln of a factor on the rate that the runs do not show, and its standard uncertainty.

    Reference: prediction interval of a regression, NIST/SEMATECH e-Handbook, section 4.5 (from memory), on the
    logarithm. A correction by less than its own uncertainty is not made: adjusting a stable process by its last error
    raises its variance (Deming, Out of the Crisis, 1986, ch. 11, from memory).
    """
    dead = law.get("dead")
    log_rate = law.log_depth(1.0 + dead, wear, conditions, per_time=True)[0] + extra[0]
    best = dead + float(np.exp(np.log(thickness_nm) - log_rate))
    keep = False
    chosen = best
    if last is not None and last > dead:
        log, sigma = law.log_depth(last, wear, conditions)
        keep = abs(log + extra[0] - np.log(thickness_nm)) <= law.factor * np.hypot(sigma, extra[1])
        chosen = last if keep else best
    sigma = float(np.hypot(law.log_depth(best, wear, conditions)[1], extra[1]))
    own = float(np.median(law.series.own))
    spread = float(np.sqrt(sigma**2 + law.scatter**2))
    half = float(np.hypot(law.factor * np.hypot(spread, own if law.scatter < own else 0.0), COVERAGE_FACTOR * common))
    low, high = (dead + (best - dead) * float(np.exp(sign * half)) for sign in (-1.0, 1.0))
    low, high = min(low, chosen), max(high, chosen)
    exposure = Quantity(value=chosen, sigma=(high - low) / (2 * COVERAGE_FACTOR), low=low, high=high)
    centre = float(np.exp(log_rate)) * (chosen - dead)
    depth = Quantity.between(centre, centre * float(np.exp(-half)), centre * float(np.exp(half)))
    ends = [np.log(thickness_nm / centre * (1 + sign * within_percent / 100)) / spread for sign in (1.0, -1.0)]
    chance = float(stdtr(law.freedom, ends[0]) - stdtr(law.freedom, ends[1])) if within_percent < 100 else 1.0
    return NextTime(exposure, depth, chance, bool(keep))
