"""The main job: from a run file to a result. Read, build, choose, ask, judge, check, tell.

Knows the order of the steps; each step stands in a room of its own.
"""

import time
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from threadpoolctl import threadpool_limits

from filmfit.answers.about import assumptions, curve, limits, nuisances, provenance, summary
from filmfit.answers.film import all_layers, effective_mass, main_results
from filmfit.errors import Faults, FilmfitError
from filmfit.fit.blunders import suspicions
from filmfit.fit.build import Built, build_problem
from filmfit.fit.choose import Outcome, choose
from filmfit.fit.crosscheck import tmm_difference
from filmfit.fit.inputs import RunInput
from filmfit.fit.interval import Posterior
from filmfit.fit.scan import Reading
from filmfit.result import Alternative, Curve, Result, Results
from filmfit.runfile.keys import as_record
from filmfit.runfile.load import RunFile, load_run_file
from filmfit.spectra.read import check_sum, read_spectrum
from filmfit.spectra.spectrum import Spectrum
from filmfit.verdict import judge

NEAR_NORMAL_DEG = 15.0  # up to here R and T of one film may be added


@dataclass(frozen=True)
class Fitted:
    """A fitted run: its result, its curves for the picture, and what the records keep of its conditions."""

    result: Result
    curves: tuple[Curve, ...]
    conditions: dict[str, Any]
    run_file_sha256: str


def fit_run(path: str | Path) -> Fitted:
    """Return the fit of one run file.

    Args:
        path: the run file; the spectra it names are read relative to it.

    Raises:
        Faults: everything that is wrong with the run file and its spectra, one sentence each.
    """
    started = time.perf_counter()
    file = load_run_file(path)
    given = read_run(file)
    built = build_problem([given])
    with threadpool_limits(limits=1, user_api="blas"):
        outcome = choose(built.problem, built.film[0], built.hints_nm[0])
        result, curves = _answer(file, given, built, outcome, started)
    return Fitted(result, curves, as_record(file.content), file.sha256)


def read_run(file: RunFile) -> RunInput:
    """Return a run file with its spectra.

    Raises:
        Faults: every spectrum that cannot be read, and R and T that cannot belong together.
    """
    faults: list[FilmfitError] = []
    content = file.content
    groups: list[list[Spectrum]] = [[], []]
    for group, keys, name in (
        (groups[0], content.spectrum, ("spectrum",)),
        (groups[1], content.substrate.spectrum, ("substrate", "spectrum")),
    ):
        for number, one in enumerate(keys):
            try:
                where = file.where(*name, number, "file")
                group.append(read_spectrum(file.resolve(one.file), one.quantity, one.column, where))
            except FilmfitError as error:
                faults.append(error)
    if not faults:
        faults += _sum_faults(file, groups[0])
    if faults:
        raise Faults(faults)
    return RunInput(file, tuple(groups[0]), tuple(groups[1]))


def _sum_faults(file: RunFile, coated: list[Spectrum]) -> list[FilmfitError]:
    """Return what is wrong with R and T of one side taken together."""
    pairs = list(zip(file.content.spectrum, coated, strict=True))
    near = [(keys, one) for keys, one in pairs if keys.angle_deg <= NEAR_NORMAL_DEG]
    reflected = [one for keys, one in near if keys.quantity == "R" and keys.side == "film"]
    transmitted = [one for keys, one in near if keys.quantity == "T"]
    if not reflected or not transmitted:
        return []
    try:
        check_sum(reflected[0], transmitted[0], file.where("spectrum"))
    except FilmfitError as error:
        return [error]
    return []


def _answer(
    file: RunFile, given: RunInput, built: Built, outcome: Outcome, started: float
) -> tuple[Result, tuple[Curve, ...]]:
    """Return the result and the curves of a chosen fit."""
    posterior = Posterior.of(outcome.solution).looked_along(outcome.thickness)
    solution = posterior.solution
    outcome = replace(outcome, solution=solution)
    run = solution.problem.runs[0]
    (seen,) = solution.problem.predict(solution.values)
    fits, start = [], 0
    for scan in built.problem.runs[0].scans:
        fits.append(Reading(scan, seen.values[start : start + scan.values.size]))
        start += scan.values.size
    mass = effective_mass(file, built)
    main = built.main[0][1]
    results = main_results(file, built, posterior, main, mass)
    difference = tmm_difference(run, solution.values)
    blunders = suspicions(outcome.plain, solution, built.film[0])
    reasons, answer = judge(file, built, outcome, blunders, fits, results, difference)
    alternatives = [Alternative(thickness_nm=r.thickness_nm, delta_bic=r.delta_bic) for r in outcome.rivals]
    if answer == "unusable":
        found = float(solution.values[outcome.thickness])
        alternatives.insert(0, Alternative(thickness_nm=found, delta_bic=0.0))
        results = Results()
    result = Result(
        run=run.run,
        film=file.content.run.film,
        answer=answer,
        reasons=tuple(reasons),
        results=results,
        layers=() if answer == "unusable" else all_layers(file, posterior),
        instrument=nuisances(posterior),
        alternatives=tuple(alternatives),
        assumptions=assumptions(file, built, outcome, posterior, mass),
        limits=limits(file, results),
        fit=summary(outcome, built.film[0][1], fits, time.perf_counter() - started),
        provenance=provenance(file, given, difference),
    )
    return result, tuple(curve(fit) for fit in fits)
