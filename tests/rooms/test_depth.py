"""Rows of a layer: slices, rough surfaces, and what they do to R and T."""

from dataclasses import replace

import numpy as np
import pytest

from filmfit.fit.depth import MOST_SLICES, STANDS, Grade
from filmfit.fit.problem import Parameter
from filmfit.fit.structures import STRUCTURES, graded, rough, sliced


def with_layer(problem, added, **changes):
    run = problem.runs[0]
    layer = replace(run.layers[0], **changes)
    return replace(problem, parameters=(*problem.parameters, *added), runs=(replace(run, layers=(layer,)),))


@pytest.fixture
def problem(make):
    return make()


def uneven(problem, carriers=0.4, density=0.1, rough_nm=12.0):
    first = len(problem.parameters)
    names = ("grade_carriers", "grade_density", "rough_nm")
    added = [
        Parameter(f"layer.a.{n}", v, -1.0, 50.0) for n, v in zip(names, (carriers, density, rough_nm), strict=True)
    ]
    return with_layer(problem, added, grade=Grade(first, first + 1), rough=first + 2)


def test_derivatives_are_difference_quotients(problem):
    problem = uneven(problem)
    values = problem.start_values()
    (seen,) = problem.predict(values)
    for at, parameter in enumerate(problem.parameters):
        step = np.zeros_like(values)
        step[at] = 1e-5 * max(abs(parameter.start), 0.01)
        above, below = (problem.predict(values + sign * step)[0].values for sign in (1, -1))
        quotient = (above - below) / (2 * step[at])
        # slit and offset act through slopes in wavelength, whose own dependence on parameters is left out
        loose = 2e-2 if parameter.name.endswith(("slit_nm", "offset_nm")) else 3e-3
        assert seen.jacobian[at] == pytest.approx(quotient, abs=loose * np.abs(quotient).max() + 1e-9), parameter.name


def test_slices_are_added_until_the_spectra_stand(problem):
    problem = uneven(problem, rough_nm=0.0)
    values = problem.start_values()
    fine = sliced(problem, values)
    more = with_layer(fine, (), grade=fine.runs[0].layers[0].grade._replace(slices=MOST_SLICES))
    first, settled, best = (one.predict(values)[0].values for one in (problem, fine, more))
    assert np.abs(first - best).max() > 2 * STANDS
    assert np.abs(settled - best).max() < STANDS


def test_no_contrast_and_no_roughness_change_nothing(problem):
    (plain,) = problem.predict(problem.start_values())
    flat = uneven(problem, 0.0, 0.0, 0.0)
    (seen,) = flat.predict(flat.start_values())
    assert seen.values == pytest.approx(plain.values, abs=1e-12)


def test_volume_counts_the_solid_half_of_a_rough_surface(problem):
    layer_problem = uneven(problem, rough_nm=10.0)
    layer, values = layer_problem.runs[0].layers[0], layer_problem.start_values()
    assert layer.volume_nm(values) == pytest.approx(values[layer.thickness] + 5.0)
    assert layer.top_nm(values) == pytest.approx(values[layer.thickness] + 10.0)


@pytest.mark.parametrize("name", STRUCTURES)
def test_a_structure_opens_free_parameters(problem, name):
    for opened in STRUCTURES[name](problem, 0, 0):
        assert len(opened.free) > len(problem.free) or name == "light lost by scattering"
        residual, jacobian = opened.evaluate(opened.start_values()[list(opened.free)])
        assert np.isfinite(residual).all()
        assert np.isfinite(jacobian).all()


def test_names_say_where_they_belong(problem):
    (opened,) = rough(problem, 0, 0)
    assert opened.parameters[-1].name == "layer.run0/film.rough_nm"
    assert [one.parameters[-2].start > 0 for one in graded(problem, 0, 0)] == [False, True]
