"""Deposition rates: definition, weighted line with dead time, in-line rate, tooling, uniformity."""

import numpy as np
import pytest

from filmfit.rates.line import dynamic_rate, new_tooling, uniformity, weighted_line
from filmfit.rates.rate import rate_nm_min
from filmfit.result import Quantity


def test_rate_of_a_run():
    # 152.4 nm in 318 s = 28.75471698 nm/min
    rate = rate_nm_min(Quantity.normal(152.4, 0.9), 318.0)
    assert rate.value == pytest.approx(28.75471698, abs=1e-8)
    assert rate.sigma == pytest.approx(0.9 * 60 / 318)


def test_time_times_rate_is_the_thickness_and_the_interval_keeps_its_shape():
    depth = Quantity.between(20.0, 14.0, 31.0)
    rate = rate_nm_min(depth, 90.0)
    for name in ("value", "low", "high"):
        assert getattr(rate, name) * 90.0 / 60.0 == pytest.approx(getattr(depth, name))


def test_a_bound_stays_a_bound():
    rate = rate_nm_min(Quantity.at_least(100.0), 60.0)
    assert (rate.value, rate.low, rate.high) == (None, 100.0, None)


T = np.array([60.0, 120, 180, 300, 480])
D = np.array([27.1, 57.4, 86.0, 144.8, 232.5])
SIGMA = np.array([0.8, 0.8, 1.0, 1.5, 2.5])


def test_weighted_line_and_dead_time():
    # worked out with rational arithmetic from the normal equations
    line = weighted_line(T, D, SIGMA)
    assert (line.slope, line.slope_sigma) == pytest.approx((0.4890093995, 0.0048748), abs=5e-8)
    assert (line.intercept, line.intercept_sigma) == pytest.approx((-1.8450275085, 0.8309), abs=5e-5)
    assert line.slope == pytest.approx(0.4890093995, abs=1e-8)
    assert line.intercept == pytest.approx(-1.8450275085, abs=1e-8)
    assert line.covariance == pytest.approx(-3.373479e-3, abs=1e-8)
    assert (line.chi2, line.freedom) == (pytest.approx(0.79703577, abs=1e-8), 3)
    assert line.dead_time == pytest.approx(3.772990, abs=1e-6)
    assert line.time_for(150.0) == pytest.approx((310.515560, 1.925526), abs=1e-6)
    origin = weighted_line(T, D, SIGMA, through_origin=True)
    assert origin.slope == pytest.approx(0.4799932430, abs=1e-8)
    assert (origin.chi2, origin.freedom) == (pytest.approx(5.7282, abs=5e-5), 4)


def test_in_line_tooling_and_uniformity():
    assert dynamic_rate(450.0, 1.20, 3) == pytest.approx(180.0)
    assert new_tooling(132.0, 148.0, 155.0) == pytest.approx(126.03870968, abs=1e-8)
    spread, deviation = uniformity(np.array([148.0, 150, 153, 151, 146]))
    assert spread == pytest.approx(0.02341137, abs=1e-8)
    assert deviation == pytest.approx(0.01806050, abs=1e-8)
