"""The crystal monitor's new tooling: the figure to type into the controller.

Knows which runs count: those since tooling, density or Z-ratio were last edited, or the crystal changed.
"""

from collections.abc import Sequence

import numpy as np
from scipy.special import stdtrit

from filmfit.jobs.rate_groups import common_share
from filmfit.rates.line import new_tooling
from filmfit.records.series import Deposited
from filmfit.result import COVERAGE_FACTOR, Quantity

SETTINGS = ("crystal_tooling_percent", "crystal_density_g_cm3", "crystal_z_ratio")
CRYSTAL = "crystal"  # a column of the lab's own that names the crystal begins a segment too


def tooling(runs: Sequence[Deposited]) -> Quantity | None:
    """Return the new tooling in percent with its interval; None where no run has monitor, tooling and thickness.

    Args:
        runs: in the order of time. The step height is taken as the actual thickness, else the fitted one.
    """
    told = [run for run in runs if run.run.get("crystal_nm") and run.run.get("crystal_tooling_percent")]
    if not told:
        return None
    last = _settings(told[-1])
    mine: list[Deposited] = []
    for run in reversed(told):
        if _settings(run) != last:
            break
        mine.append(run)
    old = float(told[-1].run["crystal_tooling_percent"])
    each = np.array([new_tooling(old, _actual(run), float(run.run["crystal_nm"])) for run in mine])
    value = float(each.mean())
    if each.size < 2:
        return Quantity(value=value, sigma=None, low=None, high=None)
    half = float(stdtrit(each.size - 1, 0.975) * each.std(ddof=1) / np.sqrt(each.size))
    half = float(np.hypot(half, COVERAGE_FACTOR * value * common_share(mine)))
    return Quantity.between(value, value - half, value + half)


def _settings(run: Deposited) -> tuple[object, ...]:
    """Return what the controller was set to, and which crystal was in."""
    return (*(run.run.get(name) for name in SETTINGS), run.conditions.get("other", {}).get(CRYSTAL))


def _actual(run: Deposited) -> float:
    """Return the thickness that the monitor should have shown."""
    return float(run.run.get("step_nm") or run.thickness_nm or 0.0)
