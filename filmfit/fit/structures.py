"""What a film may be beside smooth and alike at every depth: each structure opens parameters of its own.

Knows the parameters and where they begin; does not decide which structure the data ask for (choose.py does).
"""

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from filmfit.dispersion.compose import Dispersion
from filmfit.fit.depth import DRUDE_NAMES, MOST_SLICES, STANDS, Grade, LayerModel
from filmfit.fit.model import RunModel
from filmfit.fit.problem import Parameter, Problem
from filmfit.stack import FloatArray

HAZE = (".haze_R", ".haze_T")
HAZE_START = 0.01
# Shares of the mean by which top and middle of a film may differ: what published gradients need (from memory).
CARRIERS_SIGMA, CARRIERS_LIMIT, CARRIERS_START = 0.4, 0.95, 0.25
DENSITY_SIGMA, DENSITY_LIMIT = 0.1, 0.6
ROUGH_START_NM, ROUGH_SIGMA_NM, ROUGH_HIGH_NM = 6.0, 10.0, 100.0  # sputtered films, common practice, no source

GAP_NAME, SECOND = "tauc-lorentz.gap_eV", "tauc-lorentz-2"
EDGE_STARTS = ((0.3, 10.0), (2.0, 30.0))  # width and amplitude in eV: an exciton at the edge, a second band

# Opens a structure in one layer of one run: the problems to solve, each with another start.
Opening = Callable[[Problem, int, int], tuple[Problem, ...]]


def scattering(problem: Problem, run: int, layer: int) -> tuple[Problem, ...]:
    """Return the problem with light lost by scattering."""
    free = {p.name: {"vary": True, "start": HAZE_START} for p in problem.parameters if p.name.endswith(HAZE)}
    return (problem.changed(free),)


def graded(problem: Problem, run: int, layer: int) -> tuple[Problem, ...]:
    """Return the problem with constants that run through a layer's depth, more carriers at the top or at the bottom."""
    target = problem.runs[run].layers[layer]
    has_carriers = target.dispersion is not None and DRUDE_NAMES[0] in target.dispersion.names
    stem = f"layer.{problem.runs[run].run}/{target.name}"
    first = len(problem.parameters)
    opened = []
    for sign in (-1.0, 1.0):
        carriers = Parameter(
            f"{stem}.grade_carriers", sign * CARRIERS_START if has_carriers else 0.0, -CARRIERS_LIMIT, CARRIERS_LIMIT,
            0.0, CARRIERS_SIGMA, has_carriers,
        )  # fmt: skip
        start = 0.0 if has_carriers else sign * DENSITY_SIGMA
        density = Parameter(f"{stem}.grade_density", start, -DENSITY_LIMIT, DENSITY_LIMIT, 0.0, DENSITY_SIGMA)
        changed = replace(target, grade=Grade(first, first + 1))
        opened.append(_with_layer(problem, run, layer, changed, (carriers, density)))
    return tuple(opened)


def rough(problem: Problem, run: int, layer: int) -> tuple[Problem, ...]:
    """Return the problem with a rough surface on a layer, half of it solid."""
    target = problem.runs[run].layers[layer]
    name = f"layer.{problem.runs[run].run}/{target.name}.rough_nm"
    added = Parameter(name, ROUGH_START_NM, 0.0, ROUGH_HIGH_NM, 0.0, ROUGH_SIGMA_NM)
    changed = replace(target, rough=len(problem.parameters))
    return (_with_layer(problem, run, layer, changed, (added,)),)


def sliced(problem: Problem, values: FloatArray) -> Problem:
    """Return the problem with graded layers cut until R and T at the given values (P,) stand to 1e-4."""
    seen = _spectra(problem, values)
    while True:
        finer = _cut_again(problem)
        if finer is None:
            return problem
        now = _spectra(finer, values)
        if np.abs(now - seen).max() < STANDS:
            return problem
        problem, seen = finer, now


def _spectra(problem: Problem, values: FloatArray) -> FloatArray:
    """Return all predicted readings of all runs, one after the other."""
    return np.concatenate([seen.values for seen in problem.predict(values)])


def _cut_again(problem: Problem) -> Problem | None:
    """Return the problem with twice the slices, None where no layer has room for more."""
    cut = False
    runs = []
    for run in problem.runs:
        layers = []
        for layer in run.layers:
            if layer.grade is not None and 2 * layer.grade.slices <= MOST_SLICES:
                layer, cut = replace(layer, grade=layer.grade._replace(slices=2 * layer.grade.slices)), True
            layers.append(layer)
        runs.append(replace(run, layers=tuple(layers)))
    return replace(problem, runs=tuple(runs)) if cut else None


def second_oscillator(problem: Problem, run: int, layer: int) -> tuple[Problem, ...]:
    """Return the problem with a second, narrow Tauc-Lorentz oscillator at a layer's absorption edge."""
    target = problem.runs[run].layers[layer]
    if not isinstance(target.dispersion, Dispersion) or GAP_NAME not in target.dispersion.names:
        return ()
    gap_eV = problem.parameters[int(target.laws[target.dispersion.names.index(GAP_NAME)])].start
    law = Dispersion((*target.dispersion.laws, SECOND))
    stem = f"layer.{problem.runs[run].run}/{target.name}.{SECOND}"
    first = len(problem.parameters)
    opened = []
    for width_eV, amplitude_eV in EDGE_STARTS:
        added = (
            Parameter(f"{stem}.amplitude_eV", amplitude_eV, 0.0, 300.0),
            Parameter(f"{stem}.peak_eV", gap_eV + 0.5 * width_eV, 1.0, 9.0),
            Parameter(f"{stem}.width_eV", width_eV, 0.05, 10.0),
            Parameter(f"{stem}.gap_eV", gap_eV - 0.1, 0.5, 6.0),
        )
        changed = replace(target, dispersion=law, laws=np.append(target.laws, first + np.arange(len(added))))
        opened.append(_with_layer(problem, run, layer, changed, added))
    return tuple(opened)


STRUCTURES: dict[str, Opening] = {
    "second oscillator": second_oscillator,
    "light lost by scattering": scattering,
    "graded in depth": graded,
    "rough surface": rough,
}


def _with_layer(problem: Problem, run: int, layer: int, changed: LayerModel, added: tuple[Parameter, ...]) -> Problem:
    """Return the problem with one layer replaced and parameters added."""
    model = problem.runs[run]
    new: RunModel = replace(model, layers=(*model.layers[:layer], changed, *model.layers[layer + 1 :]))
    runs = (*problem.runs[:run], new, *problem.runs[run + 1 :])
    return replace(problem, parameters=problem.parameters + added, runs=runs)
