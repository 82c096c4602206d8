"""A run file with its spectra, and each spectrum as a scan of the fit.

Knows what was measured and how; does not know layers or parameters.
"""

from dataclasses import dataclass

import numpy as np

from filmfit.fit.scan import Scan, noise_sigma
from filmfit.runfile.keys import BareSpectrum, Spectrum
from filmfit.runfile.load import RunFile
from filmfit.spectra.spectrum import Spectrum as Measured
from filmfit.stack import Beam


@dataclass(frozen=True)
class RunInput:
    """A run file with its spectra as read: of the coated plate and of the bare one, in the file's order."""

    file: RunFile
    coated: tuple[Measured, ...]
    bare: tuple[Measured, ...]


def scan_of(keys: BareSpectrum | Spectrum, measured: Measured, side: str, back: str, coated: bool) -> Scan:
    """Return a measured spectrum as the fit uses it, its noise as stated or from its own scatter.

    A rear face is blackened for R alone: T in such a run file was measured before.
    """
    if keys.quantity == "T" and back == "blackened":
        back = "bare"
    sigma = keys.sigma if keys.sigma is not None else noise_sigma(measured.values)
    beam = Beam(keys.quantity, keys.angle_deg, keys.polarization, side, back)  # type: ignore[arg-type]
    return Scan(beam, measured.wavelength_nm, measured.values, np.full(measured.values.size, sigma), coated)
