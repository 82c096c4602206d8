"""The absorption edge read off an absorption curve: the direct intercept and the energy at a given absorption.

Knows alpha against energy; does not know the film or the fit that it comes from.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

GRID_EV = 0.005
WINDOW_EV = 0.2
CENTRE_STEP_EV = 0.01
LEAST_ALPHA_CM = 1e4
SIGNIFICANT = 0.5  # a slope maximum counts from this share of the largest slope
STATIONARY = 0.3  # d intercept / d centre beyond which there is no linear part


@dataclass(frozen=True)
class DirectGap:
    """Intercept of (alpha E)^2, its half spread over windows nearby, and whether a linear part was found at all."""

    intercept_eV: float
    half_spread_eV: float
    drift: float
    linear: bool


def direct_gap(energy_eV: FloatArray, alpha_cm: FloatArray) -> DirectGap | None:
    """Return the direct-allowed gap from the first significant maximum of the slope of (alpha E)^2.

    Args:
        energy_eV: ascending (E,).
        alpha_cm: absorption coefficient (E,), 1/cm.

    Returns:
        The intercept; `linear` False means a lower bound only. None where the absorption stays below 1e4 per cm or
        the edge is narrower than one window.

    Reference: Tauc, Grigorovici, Vancu, Phys. Status Solidi 15, 627 (1966) for the form; that extrapolation has no
        linear part in degenerate oxides: Dolgonos, Mason, Poeppelmeier, J. Solid State Chem. 240, 43 (2016);
        tests/published/test_gap_values.py.
    """
    grid = np.arange(energy_eV[0], energy_eV[-1] + 1e-9, GRID_EV)
    curve = (np.interp(grid, energy_eV, alpha_cm) * grid) ** 2
    weak = np.flatnonzero(np.interp(grid, energy_eV, alpha_cm) <= LEAST_ALPHA_CM)
    first = int(weak[-1]) + 1 if weak.size else 0
    if first >= grid.size:
        return None
    centres = np.arange(grid[first] + WINDOW_EV / 2, grid[-1] - WINDOW_EV / 2 + 1e-9, CENTRE_STEP_EV)
    if centres.size < 4:
        return None
    slopes, intercepts = _lines(grid, curve, centres)
    reach = max(1, round(WINDOW_EV / 2 / CENTRE_STEP_EV))
    peak = next(
        (
            at
            for at in range(1, centres.size - 3)
            if slopes[at] >= SIGNIFICANT * slopes.max()
            and slopes[at] >= slopes[max(0, at - reach) : at + reach + 1].max()
        ),
        None,
    )
    at = centres.size - 1 if peak is None else peak
    near = np.abs(centres - centres[at]) <= WINDOW_EV / 2 + 1e-9
    drift = float(np.polyfit(centres[near], intercepts[near], 1)[0]) if near.sum() > 2 else np.inf
    spread = float(np.ptp(intercepts[near])) / 2
    return DirectGap(float(intercepts[at]), spread, drift, peak is not None and abs(drift) <= STATIONARY)


def _lines(grid: FloatArray, curve: FloatArray, centres: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return slope and intercept with zero of a straight line in a window about each centre."""
    slopes, intercepts = np.empty(centres.size), np.empty(centres.size)
    for number, centre in enumerate(centres):
        inside = np.abs(grid - centre) <= WINDOW_EV / 2 + 1e-9
        slope, height = np.polyfit(grid[inside] - centre, curve[inside], 1)
        slopes[number] = slope
        intercepts[number] = centre - height / slope if slope else np.nan
    return slopes, intercepts


def energy_at_absorption(energy_eV: FloatArray, alpha_cm: FloatArray, level_cm: float) -> float:
    """Return the energy beyond which the absorption stays above a level, nan where it never does inside the data.

    Args:
        energy_eV: ascending (E,).
        alpha_cm: absorption coefficient (E,), 1/cm.
        level_cm: the level, 1/cm.
    """
    below = np.flatnonzero(alpha_cm <= level_cm)
    if below.size == 0 or below[-1] == energy_eV.size - 1:
        return float("nan")
    left = int(below[-1])
    logs = np.log(np.maximum(alpha_cm[left : left + 2], 1e-300))
    share = (np.log(level_cm) - logs[0]) / (logs[1] - logs[0])
    return float(energy_eV[left] + share * (energy_eV[left + 1] - energy_eV[left]))
