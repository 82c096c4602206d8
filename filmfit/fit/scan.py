"""A measured spectrum as the fit uses it, and the noise it carries.

Knows wavelengths, values and their scatter; does not know files or models.
"""

from dataclasses import dataclass, replace
from math import comb

import numpy as np

from filmfit.stack import Beam, FloatArray

DIFFERENCE_ORDER = 4
NORMAL_SIGMA_PER_MEDIAN = 1.482602218505602  # 1 / (normal quantile at 3/4)
SMALLEST_SIGMA = 1e-4  # the last digit that spectrophotometers write, common practice, no source


@dataclass(frozen=True)
class Scan:
    """One spectrum of one run: where it was measured, what was found, and how sure each point is.

    `coated` is False for the bare plate. `sigma` (W,) is the noise of one point, fraction.
    """

    beam: Beam
    wavelength_nm: FloatArray
    values: FloatArray
    sigma: FloatArray
    coated: bool = True

    def thinned(self, at_most: int) -> "Scan":
        """Return the scan with at most so many points, evenly spread in wavenumber as fringes are."""
        if self.wavelength_nm.size <= at_most:
            return self
        wanted = 1.0 / np.linspace(1.0 / self.wavelength_nm[0], 1.0 / self.wavelength_nm[-1], at_most)
        keep = np.unique(np.searchsorted(self.wavelength_nm, wanted).clip(0, self.wavelength_nm.size - 1))
        return self.masked(keep)

    def straightened(self, up_to_deg: float) -> "Scan":
        """Return the scan as if measured at normal incidence, where its angle is small."""
        if self.beam.angle_deg > up_to_deg:
            return self
        return replace(self, beam=replace(self.beam, angle_deg=0.0))

    def binned(self, width_nm: float) -> "Scan":
        """Return the scan with neighbouring points averaged in groups of one size, each no wider than `width_nm`.

        Averaging loses no information while a group is narrower than the structure of the curve.
        """
        spacing = float(np.median(np.diff(self.wavelength_nm)))
        size = int(width_nm / spacing + 1e-9)
        if size <= 1:
            return self
        starts = np.arange(0, self.wavelength_nm.size, size)
        counts = np.diff(np.append(starts, self.wavelength_nm.size))
        return replace(
            self,
            wavelength_nm=np.add.reduceat(self.wavelength_nm, starts) / counts,
            values=np.add.reduceat(self.values, starts) / counts,
            sigma=np.sqrt(np.add.reduceat(self.sigma**2, starts)) / counts,
        )

    def masked(self, keep: np.ndarray) -> "Scan":
        """Return the scan with only the points that an index or boolean array keeps."""
        return replace(self, wavelength_nm=self.wavelength_nm[keep], values=self.values[keep], sigma=self.sigma[keep])


@dataclass(frozen=True)
class Reading:
    """A scan's reading by the model beside what was measured, fractions (W,)."""

    scan: Scan
    fitted: FloatArray

    @property
    def rms(self) -> float:
        """Root mean square of measured minus fitted, fraction."""
        return float(np.sqrt(np.mean((self.scan.values - self.fitted) ** 2)))

    @property
    def chi2(self) -> float:
        """Sum of squares of measured minus fitted in units of the noise."""
        return float(np.sum(((self.scan.values - self.fitted) / self.scan.sigma) ** 2))


def noise_sigma(values: FloatArray) -> float:
    """Return the noise of one point of a smooth curve from its fourth differences.

    Args:
        values: equally spaced readings (W,), fraction.

    Returns:
        Standard deviation of the noise, fraction, not under 1e-4.

    Reference: differences of order m carry the noise variance binomial(2m, m) (Gasser, Sroka, Jennen-Steinmetz,
        Biometrika 73, 625 (1986)); the median keeps edges and steps from counting;
        tests/rooms/test_scan_and_interval.py.

    Holds when: the curve is smooth over five points.
    """
    if values.size < 3 * DIFFERENCE_ORDER:
        return SMALLEST_SIGMA * 10
    differences = np.diff(values, DIFFERENCE_ORDER)
    scale = NORMAL_SIGMA_PER_MEDIAN / np.sqrt(comb(2 * DIFFERENCE_ORDER, DIFFERENCE_ORDER))
    return max(float(np.median(np.abs(differences)) * scale), SMALLEST_SIGMA)
