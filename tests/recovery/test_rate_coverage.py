"""Simulated years with drawn rate law, dead time, drift and scatter: do the intervals hold the truth?

The quick sample has 60 years, `pytest -m full -s` 200 of each kind; the share is printed.
"""

import numpy as np
import pytest

from filmfit.rates.design import carried
from filmfit.rates.fit_law import fit_law
from filmfit.rates.level import whiten
from filmfit.rates.next_time import next_time


def year(rng, wander=0.0):
    """Return the runs of a year and what is true of them."""
    n = int(rng.integers(12, 120))
    rate, drift, dead = rng.uniform(0.08, 1.0), -rng.uniform(0.0, 0.006), rng.uniform(-2.0, 8.0)
    scatter, own, power_law = 10 ** rng.uniform(-2.6, -1.5), 10 ** rng.uniform(-3.0, -2.0), rng.uniform(0.8, 1.1)
    wear = np.cumsum(rng.uniform(0.05, 1.2, n))
    wear *= min(1.0, 60 / wear[-1])
    time = rng.choice([300.0, 600.0, 900.0], n) if rng.random() < 0.7 else np.full(n, 600.0)
    power = rng.choice([300.0, 400.0], n) if rng.random() < 0.4 else np.full(n, 400.0)
    level = np.exp(np.cumsum(wander * scatter * rng.standard_normal(n + 1)))

    def depth(t, p, e):
        return rate * (1 + drift * e) * (p / 400) ** power_law * (t - dead)

    seen = depth(time, power, wear) * level[:-1] * (1 + scatter * rng.standard_normal(n))
    seen *= 1 + own * rng.standard_normal(n)
    if rng.random() < 0.5:  # blunders: a stuck shutter, a wrong line in the book
        seen[rng.choice(n, max(1, n // 60), replace=False)] *= rng.choice([0.8, 0.85, 1.2])
    made = carried(seen, np.full(n, own), time, np.zeros(n, dtype=np.int64), wear, {"power_W": power}, True)
    return made, depth, drift, dead, scatter, level[-1]


def shares(years, seed, wander=0.0):
    """Return how often the intervals hold: next thickness, next time, drift, dead time."""
    rng = np.random.default_rng(seed)
    held = {"thickness": [], "time": [], "drift": [], "dead time": []}
    for _ in range(years):
        made, depth, drift, dead, scatter, level = year(rng, wander)
        law = fit_law(made)
        time, wear = float(made.time[-1]), float(made.wear[-1]) + 0.3
        given = {name: float(value[-1]) for name, value in made.conditions.items()}
        power = given.get("power_W", 400.0)
        wanted = depth(time, power, wear)
        found = next_time(law, wanted, wear, given, 0.0, 2.0, None)
        luck = level * (1 + scatter * rng.standard_normal())
        got = depth(found.exposure.value, power, wear) * luck
        held["thickness"].append(found.thickness_nm.low <= got <= found.thickness_nm.high)
        needed = dead + (time - dead) / luck
        held["time"].append(found.exposure.low <= needed <= found.exposure.high)
        if "wear" in law.names:
            half = law.factor * law.sigma("wear")
            ends = [k / (1 - k * law.middle["wear"]) for k in (law.get("wear") - half, law.get("wear") + half)]
            held["drift"].append(ends[0] <= drift <= ends[1])
        if "dead" in law.names:
            held["dead time"].append(abs(law.get("dead") - dead) <= law.factor * law.sigma("dead"))
    return {name: float(np.mean(one)) for name, one in held.items()}


@pytest.mark.parametrize(("wander", "seed"), [(0.0, 11), (0.2, 12)])
def test_quick_sample(wander, seed):
    found = shares(60, seed, wander)
    print(f"\n60 years, wander {wander}: {found}")
    # 0.90 less three standard deviations of 60 draws at 0.95
    assert min(found["thickness"], found["time"], found["drift"]) >= 0.86


@pytest.mark.full
@pytest.mark.parametrize(("wander", "seed"), [(0.0, 1), (0.0, 2), (0.2, 3)])
def test_two_hundred_years(wander, seed):
    found = shares(200, seed, wander)
    print(f"\n200 years, wander {wander}: {found}")
    assert 0.90 <= found["thickness"] <= 0.99
    assert 0.90 <= found["time"] <= 0.99
    assert found["drift"] >= 0.90


def test_the_filter_is_the_full_covariance_matrix():
    rng = np.random.default_rng(4)
    variance = rng.uniform(0.5, 2.0, 9)
    columns = rng.normal(size=(9, 3))
    white, level, spread = whiten(columns, variance, 0.3)
    number = np.arange(9)
    full = np.diag(variance) + 0.3 * np.minimum.outer(number, number)
    inverse = np.linalg.inv(full)
    assert white[:, :3].T @ white[:, :3] == pytest.approx(columns.T @ inverse @ columns)
    assert 2 * white[:, 3].sum() == pytest.approx(np.linalg.slogdet(full)[1])
    reach = 0.3 * number  # covariance of the next level with each run
    assert level == pytest.approx(reach @ inverse @ columns)
    assert spread == pytest.approx(0.3 * 9 - reach @ inverse @ reach)
