"""One run as a function of parameters: every scan of it predicted, with derivatives.

Knows which parameter goes where in layers, plate and instrument; does not know bounds, priors or how to search.
Parameter values have shape (P,) or, for a batch of trials, (P, B); predictions (..., N) over all points of a run.
"""

from dataclasses import dataclass, replace

import numpy as np

from filmfit.fit.depth import LayerModel, Row, rows
from filmfit.fit.scan import Scan
from filmfit.measurement import Errors, observe
from filmfit.stack import ComplexArray, FloatArray, Optics

SMALL_ANGLE_DEG = 15.0
HAZE_AT_NM = 550.0
TILT_AT_NM = 550.0  # where a plate's index has neither tilt; as the terms of Cauchy's law with and without resonance
TILT_RED = 5.0  # the infrared tilt is in units of its change to about 1350 nm


@dataclass(frozen=True)
class PlateModel:
    """The plate: index and absorbance of one pass as known beforehand, and the parameters that may correct them.

    A plate that was `measured` on the same instrument is known at the instrument's own wavelengths and through its own
    slit: offset and slit do not act on it again.
    """

    thickness_mm: float
    wavelength_nm: FloatArray
    index: FloatArray
    absorbance: FloatArray  # natural logarithm, one pass at normal incidence
    index_shift: int
    index_tilts: tuple[int, int]  # towards the ultraviolet and the infrared
    factor_nm: FloatArray  # knots between which the factors on the absorbance are interpolated
    absorbance_factors: tuple[int, ...]
    absorbance_shift: int
    measured: bool

    def shares(self, wavelength_nm: FloatArray) -> FloatArray:
        """Return the weight (K, W) of each factor at the wavelengths: unit hats on the knots."""
        return np.array([np.interp(wavelength_nm, self.factor_nm, row) for row in np.eye(self.factor_nm.size)])

    def at(self, wavelength_nm: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return index and absorbance (W,) interpolated at the wavelengths."""
        return (
            np.interp(wavelength_nm, self.wavelength_nm, self.index),
            np.interp(wavelength_nm, self.wavelength_nm, self.absorbance),
        )


@dataclass(frozen=True)
class InstrumentModel:
    """Indices of the instrument's and the sample's own errors; haze is the share scattered at 550 nm."""

    scale_R: int
    scale_T: int
    offset_nm: int
    slit_nm: int
    wedge: int
    haze_R: int
    haze_T: int


@dataclass(frozen=True)
class Prediction:
    """Predicted readings (..., N) of all scans of a run, one after the other, and their derivatives (P, ..., N)."""

    values: FloatArray
    jacobian: FloatArray


@dataclass(frozen=True)
class RunModel:
    """A run: scans, layers from the substrate up, plate, instrument."""

    run: str
    scans: tuple[Scan, ...]
    layers: tuple[LayerModel, ...]
    plate: PlateModel
    instrument: InstrumentModel
    plate_held: bool = False  # no derivatives to the plate are asked for

    def coated_only(self) -> "RunModel":
        """Return the run as a search needs it: no bare plate's scans, the plate held, small angles taken for none.

        At 8 degrees R differs from that at 0 by 0.0005 and the thickness by 0.3 %: no minimum is lost by it.
        """
        scans = tuple(scan.straightened(SMALL_ANGLE_DEG) for scan in self.scans if scan.coated)
        return replace(self, scans=scans, plate_held=True)

    def thinned(self, at_most: int) -> "RunModel":
        """Return the run with at most so many points in each scan."""
        return replace(self, scans=tuple(scan.thinned(at_most) for scan in self.scans))

    def binned(self, width_nm: float) -> "RunModel":
        """Return the run with neighbouring points averaged in groups no wider than `width_nm`."""
        return replace(self, scans=tuple(scan.binned(width_nm) for scan in self.scans))

    def predict(self, values: FloatArray) -> Prediction:
        """Return what the instrument would have written, and how it depends on each parameter.

        Args:
            values: all parameters of the problem, (P,) or (P, B); offset, slit and wedge are equal over a batch.

        Returns:
            Readings and derivatives over all points of all scans.
        """
        batch = values.shape[1:]
        points = sum(scan.values.size for scan in self.scans)
        found = np.empty((*batch, points))
        jacobian = np.zeros((len(values), *batch, points))
        grids: dict[tuple[bytes, bool], OnGrid] = {}
        start = 0
        for scan in self.scans:
            key = (scan.wavelength_nm.tobytes(), scan.coated)
            if key not in grids:
                grids[key] = on_grid(self, values, scan.wavelength_nm, scan.coated)
            stop = start + scan.values.size
            found[..., start:stop] = self._scan(values, scan, grids[key], jacobian[..., start:stop])
            start = stop
        return Prediction(found, jacobian)

    def _scan(self, values: FloatArray, scan: Scan, grid: "OnGrid", jacobian: FloatArray) -> FloatArray:
        """Fill one scan's block of the Jacobian and return its readings."""
        tool = self.instrument
        scale = tool.scale_R if scan.beam.quantity == "R" else tool.scale_T
        haze = tool.haze_R if scan.beam.quantity == "R" else tool.haze_T
        # light scattered by a rough film misses specular optics, as the inverse square of the wavelength
        spread = (HAZE_AT_NM / grid.optics.wavelength_nm) ** 2 if scan.coated else np.zeros(scan.values.size)
        errors = Errors(
            values[scale][..., None] * np.exp(-values[haze][..., None] * spread),
            _common(values[tool.slit_nm]),
            _common(values[tool.wedge]) if scan.coated else 0.0,
        )
        seen = observe(grid.optics, grid.thickness_nm, self.plate.thickness_mm, scan.beam, errors, not self.plate_held)
        for number, row in enumerate(grid.rows):
            jacobian[row.thickness] += row.share * seen.d_thickness[number]
            if row.indices.size:
                # a product per real part: Re(a b) without the unused imaginary half
                slope = seen.d_epsilon[number]
                jacobian[row.indices] += row.gradient.real * slope.real - row.gradient.imag * slope.imag
        if not self.plate_held:
            for index, derivative in grid.plate.items():
                jacobian[index] += (seen.d_substrate * derivative).real
        jacobian[scale] += seen.value / values[scale][..., None]
        jacobian[haze] -= seen.value * spread
        jacobian[tool.offset_nm] += seen.d_wavelength
        jacobian[tool.slit_nm] += seen.d_slit
        jacobian[tool.wedge] += seen.d_wedge
        return seen.value


@dataclass(frozen=True)
class OnGrid:
    """Everything that scans on one wavelength grid share."""

    optics: Optics
    thickness_nm: FloatArray
    rows: tuple[Row, ...]
    plate: dict[int, ComplexArray]


def on_grid(run: RunModel, values: FloatArray, nominal_nm: FloatArray, coated: bool) -> OnGrid:
    """Evaluate a run's laws, materials and plate at the true wavelengths of a grid."""
    batch = values.shape[1:]
    true_nm = nominal_nm + _common(values[run.instrument.offset_nm])
    stack = tuple(row for layer in (run.layers if coated else ()) for row in rows(layer, values, true_nm))
    epsilon = np.empty((len(stack), *batch, true_nm.size), complex)
    thickness = np.empty((len(stack), *batch))
    for number, row in enumerate(stack):
        epsilon[number] = row.epsilon
        thickness[number] = row.share * values[row.thickness]
    plate_nm = nominal_nm if run.plate.measured else true_nm
    substrate, plate = _substrate(run.plate, values, plate_nm)
    substrate_slope = np.zeros_like(substrate) if run.plate.measured else _slope(substrate, true_nm)
    optics = Optics(true_nm, epsilon, _slope(epsilon, true_nm), substrate, substrate_slope)
    return OnGrid(optics, thickness, stack, plate)


def _common(values: FloatArray) -> float:
    """Return the one value that a batch shares."""
    return float(np.ravel(values)[0])


def _slope(values: ComplexArray, wavelength_nm: FloatArray) -> ComplexArray:
    """Return d values / d wavelength (..., W) in 1/nm."""
    if values.shape[0] == 0:
        return values
    slope: ComplexArray = np.gradient(values, wavelength_nm, axis=-1, edge_order=2)
    return slope


def _substrate(
    plate: PlateModel, values: FloatArray, wavelength_nm: FloatArray
) -> tuple[ComplexArray, dict[int, ComplexArray]]:
    """Return the plate's dielectric function (..., W) and its derivatives by parameter index."""
    index, absorbance = plate.at(wavelength_nm)
    shares = plate.shares(wavelength_nm)
    factor = sum(values[at][..., None] * share for at, share in zip(plate.absorbance_factors, shares, strict=True))
    total = factor * absorbance + values[plate.absorbance_shift][..., None]
    absorbs = total >= 0
    k_per_absorbance = wavelength_nm / (4 * np.pi * plate.thickness_mm * 1e6)
    tilts = (TILT_AT_NM / wavelength_nm) ** 2 - 1.0, ((wavelength_nm / TILT_AT_NM) ** 2 - 1.0) / TILT_RED
    index = index + values[plate.index_shift][..., None]
    index = index + sum(values[at][..., None] * tilt for at, tilt in zip(plate.index_tilts, tilts, strict=True))
    n = index + 1j * k_per_absorbance * np.where(absorbs, total, 0.0)
    by_absorbance = 2j * n * k_per_absorbance * absorbs
    return n**2, {
        plate.index_shift: 2 * n,
        **{at: 2 * n * tilt for at, tilt in zip(plate.index_tilts, tilts, strict=True)},
        **{
            at: by_absorbance * (absorbance * share) for at, share in zip(plate.absorbance_factors, shares, strict=True)
        },
        plate.absorbance_shift: by_absorbance,
    }
