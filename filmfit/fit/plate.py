"""The plate under the film: index and absorbance of one pass, from a library material or from its own R and T.

Knows bare plates; does not know films. What it finds is a beginning: the joint fit corrects it together with the
instrument, within stated expectations.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.interpolate import make_smoothing_spline
from scipy.optimize import brentq

from filmfit.fit.scan import Scan
from filmfit.materials import Material
from filmfit.stack import FloatArray

# How far a glass of one kind strays from its published constants.
INDEX_SIGMA = 0.003  # of a glass whose file does not say: common practice, no source
ABSORBANCE_FACTOR_SIGMA = 0.5  # iron content of clear float glass varies about twofold, common practice, no source
# What the bare plate's own scan leaves open.
MEASURED_FACTOR_SIGMA = 0.03  # thickness of the coated against the bare piece, common practice, no source
EDGE_ABSORBANCE = 0.03  # a rise by this much counts as much as the whole range of wavelengths
EDGE_NOISES = 4.0  # a step between neighbours is an edge beyond so many times its noise
MISFIT_PER_POINT = 0.9  # chi2 per point that the smoothed curve is allowed
PENALTY_DECADES = (-4.0, 12.0)
MEASURED_SHIFT_SIGMA = 0.003  # a flat error of the bare T scan in absorbance: as the T scale


@dataclass(frozen=True)
class PlateStart:
    """Index and absorbance (natural logarithm, one pass) on a wavelength grid, and how far each may be corrected.

    `index_shift_sigma` is absolute; `absorbance_factor_sigma` is relative; `absorbance_shift_sigma` is absolute,
    None where the absorbance may only be scaled.
    """

    wavelength_nm: FloatArray
    index: FloatArray
    absorbance: FloatArray
    material: str
    index_shift_sigma: float
    absorbance_factor_sigma: float
    absorbance_shift_sigma: float | None


def plate_of_material(material: Material, wavelength_nm: FloatArray, thickness_mm: float) -> PlateStart:
    """Return a plate of a library material.

    Args:
        material: of kind fixed.
        wavelength_nm: grid (W,) inside the material's range.
        thickness_mm: thickness of the plate.
    """
    index = np.sqrt(material.epsilon(wavelength_nm))
    absorbance = 4 * np.pi * index.imag * thickness_mm * 1e6 / wavelength_nm
    transparent = float(absorbance.max()) < 1e-6
    return PlateStart(
        wavelength_nm, index.real, absorbance, material.name, material.index_sigma or INDEX_SIGMA,
        0.0 if transparent else ABSORBANCE_FACTOR_SIGMA, None,
    )  # fmt: skip


def plate_from_scans(scans: Sequence[Scan], glasses: Sequence[Material], thickness_mm: float) -> PlateStart:
    """Return a plate from its own T, and R where given.

    The index is that of the library glass whose R (or highest T) is nearest, with the remaining shift left to the
    fit; the absorbance comes from T, smoothed as far as its noise allows.

    Args:
        scans: bare-plate scans, at least one of T.
        glasses: candidates for the index.
        thickness_mm: thickness of the plate.

    Reference: T of a bare slab: check of tests/published/test_transfer_matrix_values.py.
    """
    transmittance = next(scan for scan in scans if scan.beam.quantity == "T")
    reflectance = next((scan for scan in scans if scan.beam.quantity == "R"), None)
    grid = transmittance.wavelength_nm
    found = []
    for glass in glasses:
        index = np.sqrt(glass.epsilon(np.clip(grid, *glass.valid_nm))).real
        face = ((index - 1) / (index + 1)) ** 2
        passed = internal_transmittance(transmittance.values, face)
        if reflectance is None:
            misfit = abs(float(np.quantile(passed, 0.9)) - 0.995)
            ratio = 0.0
        else:
            expected = face + face * (1 - face) ** 2 * passed**2 / (1 - face**2 * passed**2)
            ratio = float(np.median(np.interp(grid, reflectance.wavelength_nm, reflectance.values) / expected)) - 1
            misfit = abs(ratio)
        found.append((misfit, glass, index, passed))
    misfit, glass, index, passed = min(found, key=lambda row: row[0])
    absorbance = _smooth(grid, passed, transmittance)
    spread = glass.index_sigma or INDEX_SIGMA
    return PlateStart(grid, index, absorbance, glass.name, spread, MEASURED_FACTOR_SIGMA, MEASURED_SHIFT_SIGMA)


def internal_transmittance(transmittance: FloatArray, face_reflectance: FloatArray) -> FloatArray:
    """Return the fraction of light that one pass through a bare plate leaves, from its measured T.

    Solves T = (1 - r)^2 tau / (1 - r^2 tau^2) for tau.

    Args:
        transmittance: measured T of the plate, (W,).
        face_reflectance: reflectance r of one face, (W,).

    Returns:
        tau (W,); noise may carry it below 0 or above 1.

    Reference: tests/published/test_transfer_matrix_values.py, bare slab.
    """
    through = (1 - face_reflectance) ** 2
    # the root of r^2 T tau^2 + (1 - r)^2 tau - T = 0 that vanishes with T
    root = np.sqrt(through**2 + 4 * face_reflectance**2 * transmittance**2)
    passed: FloatArray = 2 * transmittance / (through + root)
    return passed


def _smooth(grid: FloatArray, passed: FloatArray, scan: Scan) -> FloatArray:
    """Return the absorbance (W,) as the smoothest curve that the noise allows, not below zero.

    Reference: discrepancy principle: Morozov, Sov. Math. Dokl. 7, 414 (1966); Reinsch, Numer. Math. 10, 177 (1967).
    """
    floor = 2 * scan.sigma
    absorbance = -np.log(np.maximum(passed, floor))
    weight = (np.maximum(passed, floor) / scan.sigma) ** 2
    place = _arc_length(grid, absorbance, weight**-0.5)

    def curve(log_penalty: float) -> FloatArray:
        spline = make_smoothing_spline(place, absorbance, w=weight, lam=10.0**log_penalty)
        found: FloatArray = spline(place)
        return found

    def excess(log_penalty: float) -> float:
        return float(np.sum(weight * (curve(log_penalty) - absorbance) ** 2)) - MISFIT_PER_POINT * grid.size

    low, high = PENALTY_DECADES
    if excess(high) < 0:
        penalty = high
    elif excess(low) > 0:
        penalty = low
    else:
        penalty = brentq(excess, low, high, xtol=0.1)
    smooth: FloatArray = np.maximum(curve(penalty), 0.0)
    return smooth


def _arc_length(grid: FloatArray, absorbance: FloatArray, noise: FloatArray) -> FloatArray:
    """Return the place of each point along the curve (W,): a steep edge takes more room than a flat part.

    A smoothing spline over wavelength has one stiffness for the edge of the glass and for its clear range.
    """
    rise = np.abs(np.diff(absorbance)) - EDGE_NOISES * np.hypot(noise[1:], noise[:-1])
    run = np.diff(grid) / (grid[-1] - grid[0])
    steps = np.hypot(run, np.maximum(rise, 0.0) / EDGE_ABSORBANCE)
    place: FloatArray = np.concatenate([[0.0], np.cumsum(steps)])
    return place
