"""Deposition rates: definition."""

import pytest

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
