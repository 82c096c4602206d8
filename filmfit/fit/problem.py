"""A fit as one system of residuals over any number of runs: what is free, what is expected, how it all depends.

Knows parameters by full name `scope.object.parameter` and assembles the Jacobian by scope; does not search or judge.
One run is N = 1: joint fits, shared instruments and the bare plate are the same thing.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from filmfit.dispersion.compose import index_from_epsilon
from filmfit.fit.depth import IndexArray, LayerModel
from filmfit.fit.model import Prediction, RunModel
from filmfit.stack import FloatArray
from filmfit.units import HC_EV_NM


@dataclass(frozen=True)
class Parameter:
    """One number of the model.

    Args:
        name: `scope.object.parameter`, scope one of material, layer, run, instrument, plate.
        start: where it stands before the fit.
        low, high: bounds.
        expected, sigma: an expectation that enters chi2; sigma None where there is none.
        vary: False where it is held at `start`.
    """

    name: str
    start: float
    low: float
    high: float
    expected: float | None = None
    sigma: float | None = None
    vary: bool = True


@dataclass(frozen=True)
class IndexExpectation:
    """A weak expectation on a layer's refractive index at one wavelength."""

    run: int
    layer: int
    wavelength_nm: float
    value: float
    sigma: float


@dataclass(frozen=True)
class Problem:
    """Parameters and runs of one fit.

    `residuals` and `jacobian` take the values of the free parameters, in order, (F,) or, for a batch of trials,
    (F, B); rows are all points of all runs in units of their noise, then the expectations.
    """

    parameters: tuple[Parameter, ...]
    runs: tuple[RunModel, ...]
    index_expectations: tuple[IndexExpectation, ...] = ()

    @property
    def names(self) -> tuple[str, ...]:
        """Full names of all parameters."""
        return tuple(p.name for p in self.parameters)

    @property
    def free(self) -> tuple[int, ...]:
        """Indices of the parameters that vary."""
        return tuple(i for i, p in enumerate(self.parameters) if p.vary)

    @property
    def points(self) -> int:
        """Number of measured points."""
        return sum(scan.values.size for run in self.runs for scan in run.scans)

    def index(self, name: str) -> int:
        """Return the position of a parameter by its full name."""
        return self.names.index(name)

    def start_values(self) -> FloatArray:
        """Return the starting values of all parameters (P,)."""
        return np.array([p.start for p in self.parameters])

    def bounds(self) -> tuple[FloatArray, FloatArray]:
        """Return lower and upper bounds of the free parameters, each (F,)."""
        free = [self.parameters[i] for i in self.free]
        return np.array([p.low for p in free]), np.array([p.high for p in free])

    def full(self, free_values: FloatArray) -> FloatArray:
        """Return all parameters (P,) or (P, B) with the free ones set."""
        batch = free_values.shape[1:]
        values = np.broadcast_to(self.start_values().reshape(-1, *(1 for _ in batch)), (len(self.parameters), *batch))
        values = values.copy()
        values[list(self.free)] = free_values
        return values

    def changed(self, changes: Mapping[str, Mapping[str, object]]) -> "Problem":
        """Return the problem with some parameters' fields replaced: {name: {field: value}}."""
        changed = tuple(replace(p, **changes.get(p.name, {})) for p in self.parameters)  # type: ignore[arg-type]
        return replace(self, parameters=changed)

    def started(self, values: FloatArray) -> "Problem":
        """Return the problem with all parameters' starting values replaced by (P,)."""
        moved = tuple(replace(p, start=float(v)) for p, v in zip(self.parameters, values, strict=True))
        return replace(self, parameters=moved)

    def thinned(self, at_most: int) -> "Problem":
        """Return the problem with at most so many points in each scan."""
        return replace(self, runs=tuple(run.thinned(at_most) for run in self.runs))

    def binned(self, width_nm: float) -> "Problem":
        """Return the problem with neighbouring points averaged in groups no wider than `width_nm`."""
        return replace(self, runs=tuple(run.binned(width_nm) for run in self.runs))

    def predict(self, values: FloatArray) -> tuple[Prediction, ...]:
        """Return every run's prediction for all parameters (P,) or (P, B)."""
        return tuple(run.predict(values) for run in self.runs)

    def evaluate(self, free_values: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return residuals (..., M) and their derivatives (F, ..., M) for the free parameters (F,) or (F, B)."""
        values = self.full(free_values)
        free = list(self.free)
        residuals, jacobians = [], []
        for run, seen in zip(self.runs, self.predict(values), strict=True):
            measured = np.concatenate([scan.values for scan in run.scans])
            weight = 1.0 / np.concatenate([scan.sigma for scan in run.scans])
            residuals.append((seen.values - measured) * weight)
            jacobians.append(seen.jacobian[free] * weight)
        which, centre, sigma = self._expected
        if which.size:
            if centre.ndim < free_values.ndim:
                centre, sigma = centre[:, None], sigma[:, None]
            residuals.append(np.moveaxis((values[which] - centre) / sigma, 0, -1))
            own = (np.array(free)[:, None] == which)[(..., *(None for _ in free_values.shape[1:]))] / sigma
            jacobians.append(np.moveaxis(np.broadcast_to(own, (len(free), *values[which].shape)), 1, -1))
        for residual, jacobian in self._index_expectations(values):
            residuals.append(residual[..., None])
            jacobians.append(jacobian[free][..., None])
        return np.concatenate(residuals, axis=-1), np.concatenate(jacobians, axis=-1)

    @cached_property
    def _expected(self) -> tuple[IndexArray, FloatArray, FloatArray]:
        """Indices (K,) of the free parameters that are expected somewhere, where and how surely, (K,) or (K, B)."""
        found = [(i, p, p.expected if p.expected is not None else p.start) for i, p in enumerate(self.parameters)]
        found = [row for row in found if row[1].sigma is not None and row[1].vary]
        if not found:
            return np.empty(0, np.intp), np.empty(0), np.empty(0)
        pairs = np.broadcast_arrays(*(row[2] for row in found), *(row[1].sigma for row in found))  # type: ignore[arg-type]
        centre, sigma = np.array(pairs[: len(found)]), np.array(pairs[len(found) :])
        return np.array([row[0] for row in found]), centre, sigma

    def _index_expectations(self, values: FloatArray) -> Iterable[tuple[FloatArray, FloatArray]]:
        """Yield each index expectation's residual (...,) and derivatives (P, ...)."""
        for expectation in self.index_expectations:
            layer = self.runs[expectation.run].layers[expectation.layer]
            yield _index_residual(expectation, layer, values)


def _index_residual(
    expectation: IndexExpectation, layer: LayerModel, values: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return how far a layer's index is from its expectation, in sigmas (...,), and the derivatives (P, ...)."""
    assert layer.dispersion is not None
    energy_eV = np.array([HC_EV_NM / expectation.wavelength_nm])
    epsilon, gradient = layer.dispersion.evaluate(energy_eV, values[layer.laws][..., None])
    index = index_from_epsilon(epsilon[..., 0])
    jacobian = np.zeros_like(values)
    jacobian[layer.laws] = (gradient[..., 0] / (2 * index)).real / expectation.sigma
    return (index.real - expectation.value) / expectation.sigma, jacobian
