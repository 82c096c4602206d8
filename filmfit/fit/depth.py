"""A layer as rows of the transfer matrix: one where it is alike at every depth, several where it is not.

Knows how constants may run with depth and what a rough surface adds; does not know whether the data ask for it
(choose.py does).
"""

from dataclasses import dataclass, field
from typing import NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

from filmfit.dispersion.drude import drude
from filmfit.materials import Material
from filmfit.optics.mixing import bruggeman
from filmfit.stack import ComplexArray, FloatArray
from filmfit.units import HC_EV_NM

IndexArray = NDArray[np.intp]
FIRST_SLICES = 8  # of a graded layer while it is fitted; `sliced` adds what it takes
MOST_SLICES = 64
STANDS = 1e-4  # R and T of twice the slices differ by less
ROUGH_SHARE = 0.5  # of solid in a rough surface: common practice, no source
DRUDE_NAMES = ("drude.plasma_eV", "drude.damping_eV")


class Dispersive(Protocol):
    """A dielectric function with parameters: a sum of laws, with or without a correction."""

    @property
    def names(self) -> tuple[str, ...]:
        """Full names of the parameters, in order."""

    def evaluate(self, energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Return epsilon (..., E) and its derivatives (P, ..., E)."""


class Grade(NamedTuple):
    """Indices of two contrasts between the top and the middle of a layer, as shares of the mean: linear in depth.

    `carriers` acts on the Drude law's strength, `density` on all the rest of the dielectric function above 1.
    """

    carriers: int
    density: int
    slices: int = FIRST_SLICES


@dataclass(frozen=True)
class LayerModel:
    """A layer: its laws with the indices of their parameters, or a fixed material; its thickness; how it is uneven."""

    name: str
    thickness: int
    dispersion: Dispersive | None = None
    laws: IndexArray = field(default_factory=lambda: np.empty(0, np.intp))
    material: Material | None = None
    grade: Grade | None = None
    rough: int | None = None  # thickness of the rough surface

    @property
    def law_names(self) -> tuple[str, ...]:
        """Names of the layer's laws, each once; empty where it is held fixed."""
        names = self.dispersion.names if self.dispersion is not None else ()
        return tuple(dict.fromkeys(name.partition(".")[0] for name in names))

    @property
    def structure(self) -> dict[str, int]:
        """Indices of what makes the layer uneven, by name: contrasts in depth, thickness of a rough surface."""
        found: dict[str, int] = {}
        if self.grade is not None:
            found |= {"grade_carriers": self.grade.carriers, "grade_density": self.grade.density}
        return found if self.rough is None else {**found, "rough_nm": self.rough}

    def volume_nm(self, values: FloatArray) -> float:
        """Return the volume-equivalent thickness in nm for all parameters (P,): the rough surface by its solid."""
        rough = 0.0 if self.rough is None else ROUGH_SHARE * float(values[self.rough])
        return float(values[self.thickness]) + rough

    def top_nm(self, values: FloatArray) -> float:
        """Return the thickness up to the outermost solid in nm for all parameters (P,)."""
        return float(values[self.thickness]) + (0.0 if self.rough is None else float(values[self.rough]))


@dataclass(frozen=True)
class Row:
    """A homogeneous layer of the transfer matrix.

    Args:
        epsilon: dielectric function (..., W).
        indices: parameters that it depends on, (K,).
        gradient: d epsilon / d parameter, (K, ..., W).
        thickness: index of the parameter its thickness is a share of.
        share: of that parameter.
    """

    epsilon: ComplexArray
    indices: IndexArray
    gradient: ComplexArray
    thickness: int
    share: float = 1.0


def rows(layer: LayerModel, values: FloatArray, wavelength_nm: FloatArray) -> list[Row]:
    """Return a layer's rows from the substrate up.

    Args:
        layer: what it is made of.
        values: all parameters of the problem, (P,) or (P, B).
        wavelength_nm: true wavelengths (W,).

    Reference: a graded layer as a staircase: tests/rooms/test_depth.py.
    """
    batch = values.shape[1:]
    if layer.dispersion is None:
        assert layer.material is not None
        epsilon = layer.material.epsilon(np.clip(wavelength_nm, *layer.material.valid_nm))
        shape = (*batch, wavelength_nm.size)
        return [
            Row(np.broadcast_to(epsilon, shape), np.empty(0, np.intp), np.empty((0, *shape), complex), layer.thickness)
        ]
    energy_eV = HC_EV_NM / wavelength_nm
    mean = Row(*_mean(layer, layer.dispersion, values, energy_eV), layer.thickness)
    found = [mean] if layer.grade is None else _graded(layer, layer.grade, mean, values, energy_eV)
    if layer.rough is not None:
        top = found[-1]
        mixed, slope = bruggeman(top.epsilon, 1.0, ROUGH_SHARE)
        found.append(Row(mixed, top.indices, slope * top.gradient, layer.rough))
    return found


def _mean(
    layer: LayerModel, dispersion: Dispersive, values: FloatArray, energy_eV: FloatArray
) -> tuple[ComplexArray, IndexArray, ComplexArray]:
    """Return the layer's mean dielectric function with its parameters and derivatives."""
    epsilon, gradient = dispersion.evaluate(energy_eV, values[layer.laws][..., None])
    return epsilon, layer.laws, gradient


def _graded(layer: LayerModel, grade: Grade, mean: Row, values: FloatArray, energy_eV: FloatArray) -> list[Row]:
    """Return slices of equal thickness whose constants run linearly through the mean.

    epsilon(u) = mean + u (carriers x free + density x (bound - 1)), u from -1 at the substrate to 1 at the top; steps
    of the staircase are stretched so that it has the first moment of the straight line.
    """
    free, by_free = _free_carriers(layer, mean, values, energy_eV)
    bound = mean.epsilon - free - 1.0
    carriers, density = values[grade.carriers][..., None], values[grade.density][..., None]
    contrast = carriers * free + density * bound
    by_law = carriers * by_free + density * (mean.gradient - by_free)
    indices = np.append(mean.indices, [grade.carriers, grade.density])
    found = []
    for number in range(grade.slices):
        u = ((2 * number + 1) / grade.slices - 1.0) / (1.0 - grade.slices**-2)
        gradient = np.concatenate([mean.gradient + u * by_law, u * free[None], u * bound[None]])
        found.append(Row(mean.epsilon + u * contrast, indices, gradient, mean.thickness, 1.0 / grade.slices))
    return found


def _free_carriers(
    layer: LayerModel, mean: Row, values: FloatArray, energy_eV: FloatArray
) -> tuple[ComplexArray, ComplexArray]:
    """Return the Drude part of a layer and its derivatives to all the layer's parameters; zero without that law."""
    names = layer.dispersion.names if layer.dispersion is not None else ()
    by_all = np.zeros_like(mean.gradient)
    if DRUDE_NAMES[0] not in names:
        return np.zeros_like(mean.epsilon), by_all
    places = [names.index(name) for name in DRUDE_NAMES]
    epsilon, gradient = drude(energy_eV, values[layer.laws[places]][..., None])
    by_all[places] = gradient
    return epsilon, by_all
