"""The same plate by independent code at a few wavelengths: a guard against our own mistakes.

Knows a solved run; does not change it.
"""

import logging

import numpy as np

from filmfit.dispersion.compose import index_from_epsilon
from filmfit.fit.model import RunModel, on_grid
from filmfit.optics.by_tmm import plate_by_tmm
from filmfit.stack import FloatArray, ideal

log = logging.getLogger("filmfit.fit")

AT_MOST = 7  # wavelengths a scan
LARGEST_SLAB_K = 1e-4  # beyond it the incoherent sum of fluxes is no longer comparable


def tmm_difference(run: RunModel, values: FloatArray) -> float | None:
    """Return the largest difference in R or T between the kernel and `tmm`, None where none can be compared.

    Args:
        run: the run's model.
        values: all parameters (P,).

    Reference: tmm, the package of S. J. Byrnes, arXiv:1603.02720.
    """
    differences = []
    for scan in run.scans:
        every = max(1, scan.wavelength_nm.size // AT_MOST)
        grid = on_grid(run, values, scan.wavelength_nm[::every], scan.coated)
        clear = np.broadcast_to(index_from_epsilon(grid.optics.substrate).imag, grid.optics.wavelength_nm.shape)
        keep = clear < LARGEST_SLAB_K
        if not keep.any():
            continue
        ours = ideal(grid.optics, grid.thickness_nm, run.plate.thickness_mm, scan.beam).value
        try:
            R, T = plate_by_tmm(
                grid.optics.wavelength_nm,
                index_from_epsilon(grid.optics.epsilon)[::-1],
                grid.thickness_nm[::-1],
                index_from_epsilon(grid.optics.substrate),
                run.plate.thickness_mm * 1e6,
                scan.beam.angle_deg,
                scan.beam.polarization,
                scan.beam.side,
                scan.beam.back,
            )
        except ArithmeticError as refusal:
            log.info("not cross-checked: %s", refusal)
            continue
        differences.append(float(np.max(np.abs(ours - (R if scan.beam.quantity == "R" else T))[keep])))
    return max(differences, default=None)
