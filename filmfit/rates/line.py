"""A weighted straight line of thickness against time: rate and dead time.

Knows one series of points with stated uncertainties; does not know the runs behind them.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Line:
    """d = intercept + slope t, with standard uncertainties from the stated ones, chi2 and degrees of freedom."""

    slope: float
    slope_sigma: float
    intercept: float
    intercept_sigma: float
    covariance: float
    chi2: float
    freedom: int

    @property
    def dead_time(self) -> float:
        """The time at which the line meets zero thickness, in the unit of t."""
        return -self.intercept / self.slope

    def time_for(self, thickness: float) -> tuple[float, float]:
        """Return the time for a thickness and its standard uncertainty, that of the line alone."""
        t = (thickness - self.intercept) / self.slope
        variance = self.intercept_sigma**2 + t**2 * self.slope_sigma**2 + 2 * t * self.covariance
        return t, float(np.sqrt(variance)) / abs(self.slope)


def weighted_line(t: FloatArray, d: FloatArray, sigma: FloatArray, through_origin: bool = False) -> Line:
    """Return the line of least squares with weights 1/sigma^2.

    Args:
        t: times (N,).
        d: thicknesses (N,).
        sigma: their standard uncertainties (N,), > 0.
        through_origin: no dead time.

    Reference: Bevington and Robinson, Data Reduction and Error Analysis for the Physical Sciences, 3rd ed., ch. 6
    (from memory); tests/published/test_rate_values.py.
    """
    design = t[:, None] if through_origin else np.column_stack([t, np.ones_like(t)])
    weighted = design / sigma[:, None]
    covariance = np.linalg.inv(weighted.T @ weighted)
    found = covariance @ (weighted.T @ (d / sigma))
    chi2 = float(np.sum(((d - design @ found) / sigma) ** 2))
    freedom = t.size - found.size
    if through_origin:
        return Line(float(found[0]), float(np.sqrt(covariance[0, 0])), 0.0, 0.0, 0.0, chi2, freedom)
    slope_sigma, intercept_sigma = (float(one) for one in np.sqrt(np.diag(covariance)))
    return Line(float(found[0]), slope_sigma, float(found[1]), intercept_sigma, float(covariance[0, 1]), chi2, freedom)


def dynamic_rate(thickness_nm: float, carrier_speed_m_min: float, passes: int) -> float:
    """Return the in-line dynamic rate in nm m/min: thickness times speed over passes.

    Reference: usual definition (common practice, no source); tests/published/test_rate_values.py.
    """
    return thickness_nm * carrier_speed_m_min / passes


def new_tooling(old_percent: float, actual_nm: float, indicated_nm: float) -> float:
    """Return the crystal monitor's new tooling in percent: old x actual / indicated.

    Reference: usual definition (common practice, no source); tests/published/test_rate_values.py.
    """
    return old_percent * actual_nm / indicated_nm


def uniformity(values: FloatArray) -> tuple[float, float]:
    """Return (max - min)/(max + min) and the standard deviation over the mean of values (N,) on a plate.

    Reference: usual definitions (common practice, no source); tests/published/test_rate_values.py.
    """
    high, low = float(values.max()), float(values.min())
    return (high - low) / (high + low), float(values.std(ddof=1) / values.mean())
