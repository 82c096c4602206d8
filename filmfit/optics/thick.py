"""A thick plate under the layers: incoherent sums of intensities between its two faces.

Knows the plate's own absorption and how its rear face is treated; does not know the instrument.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from filmfit.optics.coherent import Bare, ComplexArray, Face, FloatArray, coherent

Quantity = Literal["R", "T"]
Back = Literal["bare", "blackened", "rough", "index-matched"]
Side = Literal["film", "substrate"]
Polarization = Literal["mean", "s", "p"]


@dataclass(frozen=True)
class PlateResponse:
    """R or T of a coated plate (..., W) and its derivatives: layers' epsilon and thickness, the plate's epsilon."""

    value: FloatArray
    d_epsilon: ComplexArray
    d_thickness: FloatArray
    d_substrate: ComplexArray


def plate(
    quantities: Sequence[Quantity],
    wavelength_nm: FloatArray,
    epsilon: ComplexArray,
    thickness_nm: FloatArray,
    substrate_epsilon: ComplexArray,
    substrate_nm: float,
    angle_deg: float,
    polarization: Polarization,
    side: Side,
    back: Back,
    *,
    plate_slopes: bool = True,
) -> tuple[PlateResponse, ...]:
    """Return R or T, or both, of layers on a thick incoherent plate, with derivatives.

    R = Rf + Tf^2 tau^2 R0 / (1 - Rb R0 tau^2) with light on the film, R0 + T0^2 tau^2 Rb / (...) with light on the
    plate's bare face, T = Tf T0 tau / (...) either way; tau = exp(-4 pi Im(Ns cos(theta_s)) ds / lambda).

    Args:
        quantities: any of "R" and "T".
        wavelength_nm: (W,).
        epsilon: layers from the air side down to the plate, (L, ..., W).
        thickness_nm: layers, (L, ...).
        substrate_epsilon: the plate's dielectric function, broadcastable to (..., W).
        substrate_nm: thickness of the plate.
        angle_deg: angle of incidence in air.
        polarization: "s", "p" or their "mean".
        side: "film" or "substrate", where the light comes from.
        back: the rear face: "bare"; "blackened" or "rough" (nothing returns, nothing is transmitted);
            "index-matched" (nothing returns, all that arrives is transmitted).
        plate_slopes: False leaves the derivative to the plate's epsilon out (zero).

    Returns:
        For each quantity its value and derivatives; complex ones mean dX = Re(derivative * d epsilon).

    Raises:
        ValueError: light on a rear face that lets none in.

    Reference: incoherent sum of intensities: Swanepoel, J. Phys. E 16, 1214 (1983) for normal incidence;
        tests/published/test_transfer_matrix_values.py.

    Holds when: the plate's own interference is averaged out by the slit, and its k < 1e-4 or it is opaque.
    """
    if side == "substrate" and back != "bare":
        raise ValueError(f"light from the substrate side needs a bare rear face, not '{back}'")
    polarizations: tuple[Literal["s", "p"], ...] = (
        ("s", "p") if polarization == "mean" and angle_deg != 0 else ("p",) if polarization == "p" else ("s",)
    )
    substrate = np.asarray(substrate_epsilon, complex)
    path = 4.0 * np.pi * substrate_nm / wavelength_nm
    responses = [
        _one_polarization(
            quantities,
            coherent(wavelength_nm, epsilon, thickness_nm, substrate, angle_deg, one),
            path,
            side,
            back,
            plate_slopes,
        )
        for one in polarizations
    ]
    if len(responses) == 1:
        return responses[0]
    return tuple(
        PlateResponse(
            0.5 * (s.value + p.value),
            0.5 * (s.d_epsilon + p.d_epsilon),
            0.5 * (s.d_thickness + p.d_thickness),
            0.5 * (s.d_substrate + p.d_substrate),
        )
        for s, p in zip(*responses, strict=True)
    )


def _one_polarization(
    quantities: Sequence[Quantity], film: Face, path: FloatArray, side: Side, back: Back, plate_slopes: bool
) -> tuple[PlateResponse, ...]:
    """Return the wanted quantities for light of one polarization; `path` is 4 pi ds / lambda.

    The partial derivatives of all quantities go through the layers in one pass: (6, Q, ..., W).
    """
    rear = film.without_layers()
    tau = np.exp(-path * film.exit.normal.imag)
    share = 1.0 / (1.0 - film.R_rear * rear.R_rear * tau**2)
    values = []
    partials = np.empty((6, len(quantities), *film.T.shape))
    for number, quantity in enumerate(quantities):
        combine = _reflected if quantity == "R" else _transmitted
        value, *rows = combine(film, rear, tau, share, side, back)
        values.append(value)
        for row, partial in enumerate(rows):
            partials[row, number] = partial
    slopes = film.slopes(*partials[:3], to_exit=plate_slopes)
    d_substrate = slopes.exit
    if d_substrate is None:
        d_substrate = np.zeros(partials.shape[1:], complex)
    else:
        by_tau = (tau * path * 0.5j) * film.exit.per_normal
        for partial, slope in zip(partials[3:], (*rear.exit_slopes(), by_tau), strict=True):
            d_substrate += partial * slope
    return tuple(
        PlateResponse(value, slopes.epsilon[:, number], slopes.thickness[:, number], d_substrate[number])
        for number, value in enumerate(values)
    )


Term = FloatArray | float
# value, then its partial derivatives to the film face's front, T, rear, the bare face's R (both ways the same), T, tau
Combined = tuple[FloatArray, Term, Term, Term, Term, Term, Term]


def _reflected(film: Face, rear: Bare, tau: FloatArray, share: FloatArray, side: Side, back: Back) -> Combined:
    """Return R and its partial derivatives; `share` sums the light's rounds between the faces."""
    if back != "bare":
        return film.R_front, 1.0, 0.0, 0.0, 0.0, 0.0, 0.0
    # light enters through one face, is returned by the other, leaves through the first again
    first, other = (film, rear) if side == "film" else (rear, film)
    back_and_forth = tau**2 * share
    returned = other.R_rear * back_and_forth
    through = first.T * returned
    value = first.R_front + first.T * through
    by_T = 2.0 * through
    by_first_rear = through**2
    by_other_rear = first.T**2 * back_and_forth * share
    by_tau = (2.0 * first.T**2) * other.R_rear * tau * share**2
    if side == "film":
        return value, 1.0, by_T, by_first_rear, by_other_rear, 0.0, by_tau
    return value, 0.0, 0.0, by_other_rear, 1.0 + by_first_rear, by_T, by_tau


def _transmitted(film: Face, rear: Bare, tau: FloatArray, share: FloatArray, side: Side, back: Back) -> Combined:
    """Return T and its partial derivatives; `share` sums the light's rounds between the faces."""
    if back == "index-matched":
        return film.T * tau, 0.0, tau, 0.0, 0.0, 0.0, film.T
    if back != "bare":
        return np.zeros_like(film.T), 0.0, 0.0, 0.0, 0.0, 0.0, 0.0
    arriving = tau * share
    per_film, per_rear = rear.T * arriving, film.T * arriving
    value = film.T * per_film
    returned = value * tau * arriving
    by_tau = film.T * rear.T * share * (2.0 * share - 1.0)
    return value, 0.0, per_film, returned * rear.R_rear, returned * film.R_rear, per_rear, by_tau
