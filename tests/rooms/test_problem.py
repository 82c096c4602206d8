"""The residual system of one and of several runs."""

import numpy as np
import pytest


def quotient(problem, free, row):
    step = 1e-6 * max(abs(free[row]), 0.05)
    more, less = free.copy(), free.copy()
    more[row] += step
    less[row] -= step
    return (problem.evaluate(more)[0] - problem.evaluate(less)[0]) / (2 * step)


def test_residuals_vanish_at_the_truth(make):
    problem = make()
    residual, _ = problem.evaluate(problem.start_values()[list(problem.free)])
    # the expectations of offset and wedge stand at 0, away from the truth
    np.testing.assert_allclose(residual[: problem.points], 0.0, atol=1e-9)


@pytest.mark.parametrize(("slit", "tolerance"), [(0.1, 1e-5), (2.0, 2e-3)])
def test_jacobian_of_two_runs_with_one_shared_law(make, slit, tolerance):
    # a slit reads the law at shifted wavelengths by its slope; how the slope itself changes is left out of the Jacobian
    problem = make(depths=(150.0, 420.0)).changed({"instrument.a.slit_nm": {"start": slit}})
    assert len([name for name in problem.names if name.startswith("material.film.")]) == 7
    assert len([name for name in problem.names if name.endswith("thickness_nm")]) == 2
    free = problem.start_values()[list(problem.free)] * 1.01
    _, jacobian = problem.evaluate(free)
    for row, index in enumerate(problem.free):
        by_hand = quotient(problem, free, row)
        scale = max(float(np.abs(by_hand).max()), 1e-3)
        # the slope of epsilon in wavelength, which carries the offset, is itself a difference over the grid
        loose = 5e-2 if problem.names[index].endswith(("offset_nm", "slit_nm")) else tolerance
        np.testing.assert_allclose(jacobian[row], by_hand, atol=loose * scale, err_msg=problem.names[index])


def test_a_runs_own_thickness_touches_its_own_points_only(make):
    problem = make(depths=(150.0, 420.0))
    free = problem.start_values()[list(problem.free)]
    _, jacobian = problem.evaluate(free)
    row = problem.free.index(problem.index("layer.run0/film.thickness_nm"))
    half = problem.points // 2
    assert np.any(jacobian[row, :half] != 0)
    assert np.all(jacobian[row, half:] == 0)


def test_two_runs_fit_together_with_one_law(make):
    from filmfit.fit.solve import solve

    problem = make(depths=(150.0, 420.0), noise_seed=3)
    start = {"layer.run0/film.thickness_nm": {"start": 158.0}, "layer.run1/film.thickness_nm": {"start": 410.0},
             "material.film.drude.plasma_eV": {"start": 1.3}}  # fmt: skip
    together = solve(problem.changed(start))
    for name, depth in (("layer.run0/film.thickness_nm", 150.0), ("layer.run1/film.thickness_nm", 420.0)):
        assert abs(together.value(name) - depth) < 4 * together.sigma(name)
    assert 0.8 < together.reduced_chi2 < 1.2
    # what two runs say of the shared law is more than one run says
    alone = solve(make(depths=(150.0,), noise_seed=3))
    name = "material.film.drude.plasma_eV"
    assert together.sigma(name) < alone.sigma(name)


def test_a_batch_of_trials_is_the_same_as_one_by_one(make):
    problem = make().changed(
        {name: {"vary": False} for name in ("instrument.a.offset_nm", "instrument.a.slit_nm", "run.run0.wedge")}
    )
    free = problem.start_values()[list(problem.free)]
    batch = free[:, None] * np.array([0.97, 1.0, 1.02])
    residual, jacobian = problem.evaluate(batch)
    for number in range(3):
        one, slopes = problem.evaluate(batch[:, number])
        np.testing.assert_allclose(residual[number], one, atol=1e-9)
        np.testing.assert_allclose(jacobian[:, number], slopes, rtol=1e-9, atol=1e-9)
