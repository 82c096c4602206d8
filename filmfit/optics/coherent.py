"""Coherent layers between air and a half-space: the reflectances of both sides, the transmittance, their derivatives.

Knows Maxwell's boundary conditions for plane layers, exp(-i w t), n + ik; does not know thick plates or instruments.

Each layer's characteristic matrix is multiplied by exp(i delta), so that an opaque layer gives 0 and never overflows.
With q = exp(2 i delta) it reads [[(1 + q)/2, (1 - q)/(2 Y)], [(1 - q) Y/2, (1 + q)/2]]. All three answers are ratios
of bilinear forms in the product of these matrices, so one sweep from each side serves every derivative.
"""

from dataclasses import dataclass
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


Term = ComplexArray | float
Vectors = tuple[Term, Term, Term, Term]  # two vectors of two components


class Slopes(NamedTuple):
    """Derivatives of one real number: dX = Re(derivative * d epsilon); thickness derivatives are real, per nm."""

    epsilon: ComplexArray
    thickness: FloatArray


class Medium(NamedTuple):
    """A medium at one angle: N cos(theta) and 1 over it; the tilted admittance Y, 1 over it, dY / d epsilon."""

    normal: ComplexArray
    per_normal: ComplexArray
    Y: ComplexArray
    per_Y: ComplexArray
    slope: ComplexArray


class _Layer(NamedTuple):
    """What a layer contributes: its matrix [[u, b], [c, u]], its medium, and 2 pi / lambda times its thickness."""

    u: ComplexArray
    b: ComplexArray
    c: ComplexArray
    medium: Medium
    depth: FloatArray


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
    exit: Medium
    _left: tuple[Vectors, ...]
    _right: tuple[Vectors, ...]
    _wavenumber: FloatArray
    _Y0: float

    def without_layers(self) -> "Face":
        """Return the bare face of the same half-space."""
        return _face(self._Y0, (), self.exit, self._wavenumber)

    def slopes(self, by_front: FloatArray, by_T: FloatArray, by_rear: FloatArray) -> Slopes:
        """Return the derivatives of any X(R_front, T, R_rear), given its partial derivatives.

        Args:
            by_front: dX / dR_front, (..., W) or, for several X at once, (Q, ..., W).
            by_T: dX / dT.
            by_rear: dX / dR_rear.

        Returns:
            Derivatives to each layer's dielectric function (L, ..., W) and thickness (L, ..., W); an axis Q, if
            any, comes before the batch axes.

        Reference: product rule on the matrices of `coherent`; tests/identities/test_optics_identities.py.
        """
        lost, front, both, rear = self._weights(by_front, by_T, by_rear)
        epsilon = np.empty((len(self._layers), *both.shape), complex)
        thickness = np.empty((len(self._layers), *both.shape))
        for number, (u, b, _, medium, depth) in enumerate(self._layers):
            p0, p1, m0, m1 = self._left[number]
            r0, r1, s0, s1 = self._right[number + 1]
            r1, s1 = r1 * medium.per_Y, s1 * medium.per_Y
            c1 = front * m1 + both * p1
            c1 *= medium.Y
            c0 = front * m0 + both * p0
            c0 -= c1
            e1 = rear * (p1 * medium.Y)
            e0 = rear * p0 - e1
            r, s = r0 - r1, s0 - s1
            # the matrix's slope in its phase is i q [[1, -1/Y], [-Y, 1]] with i q = i (2 u - 1)
            by_phase = (2j * u - 1j) * (c0 * r - e0 * s)
            by_phase.imag += lost
            by_Y = c1 * r - c0 * r1
            by_Y += e0 * s1 - e1 * s
            by_Y *= b * medium.slope
            thickness[number] = (by_phase * (self._wavenumber * medium.normal)).real
            by_phase *= (0.5 * depth) * medium.per_normal
            np.add(by_phase, by_Y, out=epsilon[number])
        return Slopes(epsilon, thickness)

    def exit_slope(self, by_front: FloatArray, by_T: FloatArray, by_rear: FloatArray) -> ComplexArray:
        """Return the derivative (..., W) of X(R_front, T, R_rear) to the exit medium's dielectric function."""
        lost, front, both, rear = self._weights(by_front, by_T, by_rear)
        _, p1, _, m1 = self._left[-1]
        by_Y = front * m1 + (both + rear) * p1
        by_Y += 0.5 * lost / self.exit.Y.real
        slope: ComplexArray = by_Y * self.exit.slope
        return slope

    def _weights(
        self, by_front: FloatArray, by_T: FloatArray, by_rear: FloatArray
    ) -> tuple[FloatArray, ComplexArray, ComplexArray, ComplexArray]:
        """Return 2 T dX/dT and the weights of the bilinear forms: dX = Re(front dA + both dD + rear dB)."""
        lost = by_T * (2.0 * self.T)
        front = by_front * (2.0 * self._front.conj() * self._inverse)
        rear = by_rear * (2.0 * self._rear.conj() * self._inverse)
        both = front * self._front
        both += rear * self._rear
        both += lost * self._inverse
        return lost, front, np.negative(both, out=both), rear


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
    sine2 = np.sin(np.radians(angle_deg)) ** 2
    cosine = float(np.sqrt(1.0 - sine2))
    wavenumber = 2.0 * np.pi / wavelength_nm
    layers = []
    for layer_epsilon, layer_nm in zip(epsilon, thickness_nm, strict=True):
        medium = _medium(layer_epsilon, sine2, polarization)
        depth = wavenumber * np.asarray(layer_nm)[..., None]
        q = np.exp(2j * depth * medium.normal)
        v = 0.5 - 0.5 * q
        layers.append(_Layer(0.5 + 0.5 * q, v * medium.per_Y, v * medium.Y, medium, depth))
    exit_ = _medium(np.asarray(exit_epsilon, complex), sine2, polarization)
    return _face(cosine if polarization == "s" else 1.0 / cosine, tuple(layers), exit_, wavenumber)


def _face(Y0: float, layers: tuple[_Layer, ...], exit_: Medium, wavenumber: FloatArray) -> Face:
    """Return the intensities of layers between media of admittance Y0 and Y, with what their slopes need."""
    left: list[Vectors] = [(Y0, 1.0, Y0, -1.0)]
    for u, b, c, _, _ in layers:
        p0, p1, m0, m1 = left[-1]
        left.append((p0 * u + p1 * c, p0 * b + p1 * u, m0 * u + m1 * c, m0 * b + m1 * u))
    right: list[Vectors] = [(1.0, exit_.Y, 1.0, -exit_.Y)]
    for u, b, c, _, _ in reversed(layers):
        r0, r1, s0, s1 = right[-1]
        right.append((u * r0 + b * r1, c * r0 + u * r1, u * s0 + b * s1, c * s0 + u * s1))
    right.reverse()
    r0, r1, s0, s1 = right[0]
    inverse = np.asarray(1.0 / (Y0 * r0 + r1), complex)
    front = np.asarray((Y0 * r0 - r1) * inverse, complex)
    rear = np.asarray((Y0 * s0 + s1) * -inverse, complex)
    absorbed = sum(2.0 * layer.depth * layer.medium.normal.imag for layer in layers)
    T = (4.0 * Y0) * exit_.Y.real * _intensity(inverse)
    if layers:
        T = T * np.exp(-absorbed)
    return Face(
        _intensity(front), T, _intensity(rear), front, rear, inverse,
        layers, exit_, tuple(left), tuple(right), wavenumber, Y0,
    )  # fmt: skip


def _intensity(amplitude: ComplexArray) -> FloatArray:
    """Return |amplitude|^2 without a square root."""
    intensity: FloatArray = amplitude.real**2 + amplitude.imag**2
    return intensity


def _medium(epsilon: ComplexArray, sine2: float, polarization: str) -> Medium:
    """Return a medium's N cos(theta), its tilted admittance and the slope of that in epsilon.

    The principal square root has Im >= 0 for epsilon in the upper half plane: the wave decays forward.
    """
    normal: ComplexArray = np.sqrt(epsilon - sine2)
    per_normal: ComplexArray = 1.0 / normal
    if polarization == "s":
        half: ComplexArray = 0.5 * per_normal
        return Medium(normal, per_normal, normal, per_normal, half)
    Y = epsilon * per_normal
    slope: ComplexArray = per_normal - (0.5 * Y) * per_normal**2
    return Medium(normal, per_normal, Y, normal / epsilon, slope)
