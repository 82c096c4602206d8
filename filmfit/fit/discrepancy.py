"""What a law leaves unsaid: a causal correction to the film's dielectric function, held small by an expectation.

Knows how far published films stray from their laws; does not decide whether the data ask for it (choose.py does).
A law that is slightly wrong otherwise pushes its error into the thickness.
"""

from dataclasses import dataclass, replace

import numpy as np

from filmfit.dispersion.compose import Dispersion
from filmfit.dispersion.correction import Correction, hat_epsilon
from filmfit.fit.depth import LayerModel
from filmfit.fit.model import RunModel
from filmfit.fit.problem import Parameter, Problem
from filmfit.fit.solve import Solution
from filmfit.stack import ComplexArray, FloatArray
from filmfit.units import HC_EV_NM

CORRELATION_EV = 1.0  # over which the correction keeps its sign
BAND_CORRELATION_EV = 0.3  # the same where narrow absorption bands must be allowed for
FINE_EV = 0.08  # spacing of knots at the absorption edge
BAND_FINE_EV = 0.06  # and everywhere where narrow bands must be allowed for
EDGE_MARGIN_EV = 0.6  # how far below the gap the edge begins
COARSE_RATIO = 0.18  # spacing of knots below the edge, as a share of the energy
GROWTH = 1.4  # of the spacing beyond the data
LAST_EV = 9.0
FLOOR = 0.02  # epsilon2 that may be missing where the law has none
TABLE_STEP_NM = 0.5
LARGEST = 50.0


@dataclass(frozen=True)
class CorrectedDispersion:
    """A law plus a correction: parameters of the law first, then the correction's coefficients."""

    law: Dispersion
    correction: Correction

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the law's parameters, then of the coefficients."""
        return (*self.law.names, *(f"correction.{number}" for number in range(self.correction.size)))

    def evaluate(self, energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Return the dielectric function (..., E) and its derivatives (P, ..., E), as `Dispersion.evaluate`."""
        split = len(self.law.names)
        epsilon, gradient = self.law.evaluate(energy_eV, values[:split])
        functions = self.correction.at(energy_eV)
        coefficients = values[split:]
        added = np.einsum("k...,kw->...w", coefficients[..., 0], functions)
        spread = functions.reshape(len(functions), *(1 for _ in epsilon.shape[:-1]), -1)
        spread = np.broadcast_to(spread, (len(functions), *epsilon.shape))
        return epsilon + added, np.concatenate([gradient, spread])


@dataclass(frozen=True)
class Freedom:
    """How free a correction is: its expected size relative to the law, and whether it may hold narrow bands."""

    size: float
    bands: bool = False


def corrected(solution: Solution, run: int, layer: int, freedom: Freedom) -> Problem:
    """Return the problem with a free correction to one layer's law, started at a solution without it.

    A layer without a law, held fixed, is not corrected.

    The correction to epsilon2 at a knot is expected to be `size` times the law's own epsilon2 there (plus a floor),
    with a correlation that falls off exponentially over 1 eV, or 0.3 eV where it may hold narrow bands.

    Args:
        solution: where the fit of the law alone ended.
        run, layer: which layer of which run.
        freedom: how large and how narrow it may be.

    Reference: model discrepancy as a Gaussian process: Kennedy and O'Hagan, J. R. Stat. Soc. B 63, 425 (2001);
        tests/recovery/.
    """
    problem = solution.problem
    target = problem.runs[run].layers[layer]
    if not isinstance(target.dispersion, Dispersion):
        return problem
    wavelength_nm = np.concatenate([scan.wavelength_nm for scan in problem.runs[run].scans if scan.coated])
    correction = _correction(target.dispersion, solution.values[target.laws], wavelength_nm, freedom)
    first = len(problem.parameters)
    added = tuple(
        Parameter(f"layer.{problem.runs[run].run}/{target.name}.correction.{number}", 0.0, -LARGEST, LARGEST, 0.0, 1.0)
        for number in range(correction.size)
    )
    indices = np.concatenate([target.laws, np.arange(first, first + correction.size)])
    changed = replace(target, dispersion=CorrectedDispersion(target.dispersion, correction), laws=indices)
    return replace(problem, parameters=problem.parameters + added, runs=_with_layer(problem, run, layer, changed))


def _with_layer(problem: Problem, run: int, layer: int, changed: LayerModel) -> tuple[RunModel, ...]:
    """Return the problem's runs with one layer replaced."""
    layers = problem.runs[run].layers
    new = replace(problem.runs[run], layers=(*layers[:layer], changed, *layers[layer + 1 :]))
    return (*problem.runs[:run], new, *problem.runs[run + 1 :])


def _correction(law: Dispersion, values: FloatArray, wavelength_nm: FloatArray, freedom: Freedom) -> Correction:
    """Return the tabulated functions of unit-variance coefficients."""
    gaps = [value for name, value in zip(law.names, values, strict=True) if name.endswith(".gap_eV")]
    shortest, longest = float(wavelength_nm.min()), float(wavelength_nm.max())
    edge_eV = 0.0 if freedom.bands else min(gaps, default=np.inf)
    fine_eV = BAND_FINE_EV if freedom.bands else FINE_EV
    knots = _knots(HC_EV_NM / longest, HC_EV_NM / shortest, edge_eV, fine_eV)
    inner = knots[1:-1]
    epsilon2 = law.evaluate(inner, values[:, None])[0].imag
    correlation = np.exp(-np.abs(inner[:, None] - inner) / (BAND_CORRELATION_EV if freedom.bands else CORRELATION_EV))
    mixing = freedom.size * (epsilon2 + FLOOR)[:, None] * np.linalg.cholesky(correlation)
    table_nm = np.arange(shortest - 10, longest + 10 + TABLE_STEP_NM, TABLE_STEP_NM)[::-1]
    energy_eV = HC_EV_NM / table_nm
    return Correction(energy_eV, mixing.T @ hat_epsilon(energy_eV, knots))


def _knots(lowest_eV: float, highest_eV: float, gap_eV: float, fine_eV: float) -> FloatArray:
    """Return ascending knots: coarse where the film is clear, fine at the edge, growing beyond the data."""
    knots = [0.75 * lowest_eV]
    while knots[-1] < highest_eV + 0.05:
        coarse = max(0.12, COARSE_RATIO * knots[-1])
        knots.append(knots[-1] + (coarse if knots[-1] < gap_eV - EDGE_MARGIN_EV else fine_eV))
    step = fine_eV
    while knots[-1] < LAST_EV:
        step *= GROWTH
        knots.append(knots[-1] + step)
    return np.array(knots)
