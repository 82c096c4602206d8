"""Coherent layers between air and a half-space: the reflectances of both sides, the transmittance, their derivatives.

Knows Maxwell's boundary conditions for plane layers, exp(-i w t), n + ik; does not know thick plates or instruments.

Each layer's characteristic matrix is multiplied by exp(i delta), so that an opaque layer gives 0 and never overflows.
With q = exp(2 i delta) it reads [[(1 + q)/2, (1 - q)/(2 Y)], [(1 - q) Y/2, (1 + q)/2]]. All three answers are ratios
of bilinear forms in the product of these matrices: one sweep from the air gives them, one sweep back every derivative.
"""

import math
from dataclasses import dataclass
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


Term = ComplexArray | float
Vectors = tuple[Term, Term, Term, Term]  # two vectors of two components


class Slopes(NamedTuple):
    """Derivatives of one real number: dX = Re(derivative * d epsilon); thickness derivatives are real, per nm.

    `exit` belongs to the exit medium's epsilon; it is None where it was not asked for.
    """

    epsilon: ComplexArray
    thickness: FloatArray
    exit: ComplexArray | None


class Medium(NamedTuple):
    """A medium at one angle: N cos(theta) and 1 over it; the tilted admittance Y, 1 over it, dY / d epsilon."""

    normal: ComplexArray
    per_normal: ComplexArray
    Y: ComplexArray
    per_Y: ComplexArray
    slope: ComplexArray


class _Layer(NamedTuple):
    """What a layer contributes: q, its matrix [[u, b], [c, u]], its medium, and 2 pi / lambda times its thickness."""

    q: ComplexArray
    u: ComplexArray
    b: ComplexArray
    c: ComplexArray
    medium: Medium
    depth: FloatArray


@dataclass(frozen=True)
class Bare:
    """A half-space's own face: intensities (..., W); it reflects the same from both sides."""

    R_front: FloatArray
    T: FloatArray
    R_rear: FloatArray
    _front: ComplexArray
    _inverse: ComplexArray
    _per_flux: FloatArray
    _slope: ComplexArray

    def exit_slopes(self) -> tuple[ComplexArray, ComplexArray]:
        """Return the derivatives (..., W) of R and T to the exit medium's epsilon: dX = Re(derivative * d epsilon)."""
        twice = (2.0 * self._inverse) * self._slope
        return -(self._front.conj() * (twice + self._front * twice)), self._per_flux * self._slope - self.T * twice


@dataclass(frozen=True)
class Face:
    """A stack of layers on a half-space: intensities (..., W) and, by `slopes`, their derivatives.

    `R_front`: light from air. `R_rear`: light from inside the exit medium. `T`: the same both ways.
    """

    R_front: FloatArray
    T: FloatArray
    R_rear: FloatArray
    _front: ComplexArray
    _rear: ComplexArray
    _inverse: ComplexArray
    _layers: tuple[_Layer, ...]
    _per_flux: FloatArray
    exit: Medium
    _left: tuple[Vectors, ...]
    _wavenumber: FloatArray
    _Y0: float

    def without_layers(self) -> Bare:
        """Return the bare face of the same half-space."""
        return _bare(self._Y0, self.exit)

    def slopes(self, by_front: FloatArray, by_T: FloatArray, by_rear: FloatArray, *, to_exit: bool = True) -> Slopes:
        """Return the derivatives of any X(R_front, T, R_rear), given its partial derivatives.

        Args:
            by_front: dX / dR_front, (..., W) or, for several X at once, (Q, ..., W).
            by_T: dX / dT.
            by_rear: dX / dR_rear.
            to_exit: False leaves the derivative to the exit medium out (None).

        Returns:
            Derivatives to each layer's dielectric function (L, ..., W) and thickness (L, ..., W), and to the exit
            medium's dielectric function (..., W); an axis Q, if any, comes before the batch axes.

        Reference: product rule on the matrices of `coherent`; tests/against/test_optics_against_tmm.py.
        """
        lost, front, both, rear = self._weights(by_front, by_T, by_rear)
        epsilon = np.empty((len(self._layers), *both.shape), complex)
        thickness = np.empty((len(self._layers), *both.shape))
        right: Vectors = (1.0, self.exit.Y, 1.0, -self.exit.Y)
        for number in reversed(range(len(self._layers))):
            layer = self._layers[number]
            medium = layer.medium
            p0, p1, m0, m1 = self._left[number]
            r0, r1, s0, s1 = right
            r1, s1 = r1 * medium.per_Y, s1 * medium.per_Y
            p1, m1 = p1 * medium.Y, m1 * medium.Y
            p, m, r, s = p0 - p1, m0 - m1, r0 - r1, s0 - s1
            # the matrix's slope in its phase is i q [[1, -1/Y], [-Y, 1]], in Y it is b [[0, -1/Y], [Y, 0]]
            iq, by_Y = 1j * layer.q, layer.b * medium.slope
            by_phase = front * (iq * (m * r))
            by_phase += both * (iq * (p * r))
            by_phase -= rear * (iq * (p * s))
            by_phase.imag += lost
            thickness[number] = (by_phase * (self._wavenumber * medium.normal)).real
            by_phase *= (0.5 * layer.depth) * medium.per_normal
            slope = front * (by_Y * (m1 * r - m * r1))
            slope += both * (by_Y * (p1 * r - p * r1))
            slope -= rear * (by_Y * (p1 * s - p * s1))
            np.add(by_phase, slope, out=epsilon[number])
            if number:
                right = _through(layer, right)
        if not to_exit:
            return Slopes(epsilon, thickness, None)
        _, p1, _, m1 = self._left[-1]
        both += rear
        exit_ = front * (m1 * self.exit.slope)
        exit_ += both * (p1 * self.exit.slope)
        exit_ += by_T * (self._per_flux * self.exit.slope)
        return Slopes(epsilon, thickness, exit_)

    def _weights(
        self, by_front: FloatArray, by_T: FloatArray, by_rear: FloatArray
    ) -> tuple[FloatArray, ComplexArray, ComplexArray, ComplexArray]:
        """Return 2 T dX/dT and the weights of the bilinear forms: dX = Re(front dA + both dD + rear dB)."""
        twice = 2.0 * self._inverse
        lost = by_T * self.T
        both = by_front * self.R_front
        both += by_rear * self.R_rear
        both += lost
        lost *= 2.0
        front = by_front * (self._front.conj() * twice)
        rear = by_rear * (self._rear.conj() * twice)
        return lost, front, np.multiply(both, np.negative(twice, out=twice), dtype=complex), rear


def coherent(
    wavelength_nm: FloatArray,
    epsilon: ComplexArray,
    thickness_nm: FloatArray,
    exit_epsilon: ComplexArray,
    angle_deg: float,
    polarization: Literal["s", "p"],
) -> Face:
    """Return how a stack of coherent layers between air and a half-space reflects and transmits.

    Args:
        wavelength_nm: vacuum wavelengths (W,).
        epsilon: dielectric functions from the air side to the exit side, (L, ..., W); L may be 0.
        thickness_nm: (L, ...), without the wavelength axis.
        exit_epsilon: dielectric function of the half-space, broadcastable to (..., W).
        angle_deg: angle of incidence in air.
        polarization: "s" or "p".

    Returns:
        Intensities and their derivatives.

    Reference: Abeles, Ann. Phys. 12, 596 (1950); Born and Wolf, Principles of Optics, ch. 1.6;
        tests/published/test_transfer_matrix_values.py, tests/against/test_optics_against_tmm.py.

    Holds when: the exit medium absorbs little (k < 1e-4), else intensities seen from inside it are not defined.
    """
    sine2 = math.sin(math.radians(angle_deg)) ** 2
    cosine = math.sqrt(1.0 - sine2)
    wavenumber = 2.0 * np.pi / wavelength_nm
    layers = []
    for layer_epsilon, layer_nm in zip(epsilon, thickness_nm, strict=True):
        medium = _medium(layer_epsilon, sine2, polarization)
        depth = wavenumber * np.asarray(layer_nm)[..., None]
        q = np.exp(2j * depth * medium.normal)
        half = 0.5 * q
        v = 0.5 - half
        layers.append(_Layer(q, 0.5 + half, v * medium.per_Y, v * medium.Y, medium, depth))
    exit_epsilon = np.asarray(exit_epsilon, complex)
    if exit_epsilon.shape[-1:] != wavelength_nm.shape:
        exit_epsilon = np.broadcast_to(exit_epsilon, np.broadcast_shapes(exit_epsilon.shape, wavelength_nm.shape))
    exit_ = _medium(exit_epsilon, sine2, polarization)
    return _face(cosine if polarization == "s" else 1.0 / cosine, tuple(layers), exit_, wavenumber)


def _face(Y0: float, layers: tuple[_Layer, ...], exit_: Medium, wavenumber: FloatArray) -> Face:
    """Return the intensities of layers between media of admittance Y0 and Y, with what their slopes need."""
    left: list[Vectors] = [(Y0, 1.0, Y0, -1.0)]
    for _, u, b, c, _, _ in layers:
        p0, p1, m0, m1 = left[-1]
        left.append((p0 * u + p1 * c, p0 * b + p1 * u, m0 * u + m1 * c, m0 * b + m1 * u))
    p0, p1, m0, m1 = left[-1]
    p1, m1 = p1 * exit_.Y, m1 * exit_.Y
    inverse = 1.0 / (p0 + p1)
    front = (m0 + m1) * inverse
    rear = (p1 - p0) * inverse
    absorbed = sum(2.0 * layer.depth * layer.medium.normal.imag for layer in layers)
    per_flux = (4.0 * Y0) * _intensity(inverse)
    if layers:
        per_flux *= np.exp(-absorbed)
    return Face(
        _intensity(front), per_flux * exit_.Y.real, _intensity(rear), front, rear, inverse,
        layers, per_flux, exit_, tuple(left), wavenumber, Y0,
    )  # fmt: skip


def _bare(Y0: float, exit_: Medium) -> Bare:
    """Return the face between media of admittance Y0 and Y: `_face` without layers, in closed form."""
    inverse = 1.0 / (Y0 + exit_.Y)
    front = (Y0 - exit_.Y) * inverse
    per_flux = (4.0 * Y0) * _intensity(inverse)
    R = _intensity(front)
    return Bare(R, per_flux * exit_.Y.real, R, front, inverse, per_flux, exit_.slope)


def _through(layer: _Layer, right: Vectors) -> Vectors:
    """Return the layer's matrix times two columns."""
    r0, r1, s0, s1 = right
    u, b, c = layer.u, layer.b, layer.c
    return u * r0 + b * r1, c * r0 + u * r1, u * s0 + b * s1, c * s0 + u * s1


def _intensity(amplitude: ComplexArray) -> FloatArray:
    """Return |amplitude|^2 without a square root."""
    intensity: FloatArray = amplitude.real**2 + amplitude.imag**2
    return intensity


def _decaying(normal: ComplexArray) -> ComplexArray:
    """Return the root with Im >= 0; a layer's matrix is the same for both, and only this one cannot overflow."""
    grows = normal.imag < 0
    return np.where(grows, -normal, normal) if grows.any() else normal


def _medium(epsilon: ComplexArray, sine2: float, polarization: str) -> Medium:
    """Return a medium's N cos(theta), its tilted admittance and the slope of that in epsilon.

    The principal square root has Im >= 0 for epsilon in the upper half plane: the wave decays forward. Adding +0i
    takes an imaginary part of -0 to the same side of the root's cut.
    """
    normal = _decaying(np.sqrt(epsilon + complex(-sine2)))
    per_normal: ComplexArray = 1.0 / normal
    if polarization == "s":
        half: ComplexArray = 0.5 * per_normal
        return Medium(normal, per_normal, normal, per_normal, half)
    Y = epsilon * per_normal
    slope: ComplexArray = per_normal - (0.5 * Y) * per_normal**2
    return Medium(normal, per_normal, Y, normal / epsilon, slope)
