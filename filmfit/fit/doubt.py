"""Where a model cannot follow a spectrum it is given less weight there: a misfit at an edge must not bend the rest.

Knows residuals along the wavelength; does not know models.
"""

from dataclasses import replace

import numpy as np
from scipy.ndimage import uniform_filter1d

from filmfit.fit.problem import Problem
from filmfit.fit.scan import Scan
from filmfit.fit.solve import Solution, solve
from filmfit.stack import FloatArray

WINDOW = 11  # points over which residuals are averaged
CLEAR_SIGMAS = 5.0  # of that average's own scatter
ROUNDS = 3


def doubted(solution: Solution) -> Solution:
    """Return the solution with points weighted by what the model misses there beside the noise, fitted anew.

    Args:
        solution: its scans' sigma is the noise of one point.

    Reference: iteratively reweighted least squares: Holland and Welsch, Commun. Stat. A 6, 813 (1977);
        tests/rooms/test_doubt.py.
    """
    noise = solution.problem
    for _ in range(ROUNDS):
        factors = excess(solution, noise)
        if all(np.all(factor == 1.0) for factor in factors):
            return solution
        scans = [
            replace(scan, sigma=scan.sigma * factor)
            for scan, factor in zip((s for run in noise.runs for s in run.scans), factors, strict=True)
        ]
        solution = solve(_with_scans(solution.problem, scans))
    return solution


def excess(solution: Solution, noise: Problem) -> list[FloatArray]:
    """Return for each scan by how much residuals exceed their noise along the wavelength, (W,), at least 1."""
    seen = noise.predict(solution.values)
    limit = 1.0 + CLEAR_SIGMAS * np.sqrt(2.0 / WINDOW)
    factors = []
    for run, prediction in zip(noise.runs, seen, strict=True):
        start = 0
        for scan in run.scans:
            stop = start + scan.values.size
            residual = (prediction.values[start:stop] - scan.values) / scan.sigma
            start = stop
            power = uniform_filter1d(residual**2, min(WINDOW, scan.values.size), mode="nearest")
            factors.append(np.sqrt(np.where(power > limit, power, 1.0)))
    return factors


def carried(doubtful: Scan, noise: Scan, onto: Scan) -> Scan:
    """Return a scan with the doubt that another sampling of it has come to."""
    factor = np.interp(onto.wavelength_nm, noise.wavelength_nm, doubtful.sigma / noise.sigma)
    return replace(onto, sigma=onto.sigma * factor)


def _with_scans(problem: Problem, scans: list[Scan]) -> Problem:
    """Return the problem with all scans of all runs replaced, in order."""
    left = iter(scans)
    return replace(problem, runs=tuple(replace(r, scans=tuple(next(left) for _ in r.scans)) for r in problem.runs))
