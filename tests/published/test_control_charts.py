"""Control charts against the worked examples of the NIST/SEMATECH e-Handbook, sections 6.3.2.2 and 6.3.2.4."""

import numpy as np
import pytest

from filmfit.rates.chart import ALARM_CHANCE, D2, D4, ewma, individuals, range_sigma, robust_sigma, trend

FLOW = np.array([49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1])  # 6.3.2.2
EWMA = np.array([52, 47, 53, 49.3, 50.1, 47, 51, 50.1, 51.2, 50.5, *FLOW])  # 6.3.2.4
RATES = np.array([0.482, 0.479, 0.481, 0.476, 0.478, 0.474, 0.475, 0.471, 0.473, 0.469])  # a falling series, invented


def test_individuals_chart_of_the_handbook():
    chart = individuals(FLOW)
    assert chart.centre == pytest.approx(50.81)
    assert chart.high[0] == pytest.approx(55.8024, abs=5e-5)
    assert chart.low[0] == pytest.approx(45.8176, abs=5e-5)
    assert range_sigma(FLOW) * D2 == pytest.approx(1.877778, abs=5e-7)
    # the handbook prints its limits with d2 = 1.128
    rounded = individuals(FLOW, sigma=1.8778 / 1.128)
    assert (round(rounded.high[0], 4), round(rounded.low[0], 4)) == (55.8041, 45.8159)
    assert not chart.outside.any()


def test_ewma_chart_of_the_handbook():
    chart = ewma(EWMA, 50.0, 2.0539, 0.3)
    assert chart.points[-3:] == pytest.approx([51.2291, 51.9403, 51.9882], abs=5e-5)
    assert chart.high[-1] == pytest.approx(52.588432, abs=2e-5)
    assert chart.low[-1] == pytest.approx(47.411568, abs=2e-5)
    assert chart.high[:3] - 50 == pytest.approx([1.848510, 2.256394, 2.431406], abs=1e-6)
    assert not chart.outside.any()


def test_a_steady_fall_passes_the_individuals_chart_and_is_caught_by_the_other_two():
    chart = individuals(RATES)
    assert chart.high[0] == pytest.approx(0.48377604, abs=1e-8)
    assert chart.low[0] == pytest.approx(0.46782396, abs=1e-8)
    assert not chart.outside.any()
    average = ewma(RATES, 0.4800, weight=0.3)
    assert (average.low[-1], average.high[-1]) == pytest.approx((0.476649, 0.483351), abs=2e-5)
    assert int(np.flatnonzero(average.outside)[0]) + 1 == 7
    assert average.points[6] == pytest.approx(0.476627, abs=1e-6)
    slope = trend(RATES)
    assert (slope.slope, slope.sigma) == pytest.approx((-0.0013090909, 0.0001750246), abs=1e-10)
    assert slope.t == pytest.approx(-7.5, abs=0.05)
    assert slope.alarm


def test_constants_of_the_normal_distribution():
    # d2 = 2/sqrt(pi), 3/d2 and D4 by the moments of |x1 - x2|
    assert pytest.approx(2.65868078, abs=1e-8) == 3 / D2
    assert pytest.approx(3.26653192, abs=1e-8) == D4
    assert range_sigma(FLOW) * D2 * D4 == pytest.approx(6.133821, abs=1e-6)


def test_robust_sigma_and_trend_alarm_as_often_as_they_should():
    rng = np.random.default_rng(2)
    drawn = rng.normal(size=20_000)
    assert robust_sigma(drawn) == pytest.approx(1.0, abs=0.03)
    drawn[::100] += 20.0
    assert robust_sigma(drawn) == pytest.approx(1.0, abs=0.03)
    assert robust_sigma(RATES) == range_sigma(RATES)
    share = np.mean([trend(rng.normal(size=12)).alarm for _ in range(6000)])
    assert abs(share - ALARM_CHANCE) < 4 * np.sqrt(ALARM_CHANCE / 6000)
    assert trend(np.ones(9)) is None
    assert trend(np.arange(4.0)) is None
