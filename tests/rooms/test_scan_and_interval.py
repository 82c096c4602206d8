"""Noise from a scan, growth of an interval by what is left in the residuals."""

import numpy as np
import pytest

from filmfit.fit.interval import Posterior, autocorrelation_sum, residual_growths
from filmfit.fit.scan import Scan, noise_sigma
from filmfit.fit.solve import solve
from filmfit.stack import Beam

BEAM = Beam("T", 0.0, "mean", "film", "bare")


@pytest.mark.parametrize("sigma", [0.0005, 0.002])
def test_noise_of_a_curve_with_fringes(sigma):
    rng = np.random.default_rng(1)
    x = np.linspace(400, 1000, 301)
    found = [noise_sigma(0.8 + 0.1 * np.sin(4 * np.pi * 900 / x) + rng.normal(0, sigma, x.size)) for _ in range(20)]
    assert np.mean(found) == pytest.approx(sigma, rel=0.1)


def test_noise_is_not_taken_for_less_than_the_last_digit():
    assert noise_sigma(np.full(100, 0.5)) == 1e-4
    assert noise_sigma(np.array([0.5, 0.4])) == 1e-3


def test_a_thinned_scan_keeps_ends_and_order():
    scan = Scan(BEAM, np.linspace(300, 2500, 1101), np.zeros(1101), np.full(1101, 0.001))
    thin = scan.thinned(60)
    assert thin.wavelength_nm.size <= 60
    assert (thin.wavelength_nm[0], thin.wavelength_nm[-1]) == (300, 2500)
    assert np.all(np.diff(thin.wavelength_nm) > 0)
    assert scan.thinned(2000) is scan


def test_white_residuals_carry_their_full_number_and_smooth_ones_do_not():
    rng = np.random.default_rng(2)
    white = rng.normal(size=400)
    smooth = np.convolve(rng.normal(size=440), np.ones(41) / 41, "valid")
    assert autocorrelation_sum(white) < 1.5
    assert autocorrelation_sum(smooth) > 10
    assert autocorrelation_sum(np.zeros(50)) == 1.0


def test_a_good_fit_does_not_grow_and_a_wrong_noise_does(make):
    from dataclasses import replace

    def growths(solution):
        residual, _ = solution.problem.evaluate(solution.values[list(solution.problem.free)])
        return [growth for _, _, growth in residual_growths(solution.problem, residual)]

    solution = solve(make(noise_seed=7))
    assert max(growths(solution)) < 1.6
    problem = make(noise_seed=7)
    half = tuple(replace(s, sigma=s.sigma / 2) for s in problem.runs[0].scans)
    too_sure = solve(replace(problem, runs=(replace(problem.runs[0], scans=half),)))
    # half the noise claimed is four times the chi2
    assert min(growths(too_sure)) > 3.5 * 0.8
    thickness = problem.index("layer.run0/film.thickness_nm")
    # expectations are not grown, so a thickness grows by a little less than the scans do
    assert Posterior.of(too_sure).growth(thickness) > 1.5


def test_derived_quantities_carry_correlations(make):
    posterior = Posterior.of(solve(make(noise_seed=8)))
    problem = posterior.solution.problem
    a, b = problem.index("material.film.tauc-lorentz.amplitude_eV"), problem.index("material.film.constant.epsilon")
    # the difference quotient of a linear function is exact, so the variance is that of the covariance
    total = posterior.plain(lambda v: float(v[a] + 20 * v[b]))
    rows = [problem.free.index(a), problem.free.index(b)]
    block = posterior.covariance[np.ix_(rows, rows)]
    weights = np.array([1.0, 20.0])
    assert total.sigma == pytest.approx(float(np.sqrt(weights @ block @ weights)), rel=1e-6)


def test_what_the_data_do_not_determine_is_none(make):
    posterior = Posterior.of(solve(make(noise_seed=8)))
    assert posterior.positive(lambda v: float(v[0]), relative_sigma=2.0) is None
    kept = posterior.positive(lambda v: float(v[0]), relative_sigma=0.5)
    assert kept is not None
    assert kept.high / kept.value == pytest.approx(kept.value / kept.low)
