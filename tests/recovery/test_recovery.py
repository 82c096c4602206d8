"""Made films come back: thickness, interval, carriers, and no wrong number sold as right."""

import pytest

QUICK = range(40)
LONG = range(400)


def check(scores):
    thick, thin = scores["thick"], scores["thin"]
    assert thick.within_1_percent >= 0.97
    assert thick.median_error <= 0.002
    assert thick.usable >= 0.85
    assert thick.covered >= 0.90
    assert thick.carriers_covered >= 0.90
    assert thin.covered >= 0.88
    assert thick.silent == thin.silent == 0


@pytest.mark.full
def test_four_hundred_films(recover):
    check(recover(LONG))


def test_forty_films(recover):
    scores = recover(QUICK)
    # forty cases cannot tell 97 % from 93 %: one more miss is allowed than the long run's shares would give
    thick, thin = scores["thick"], scores["thin"]
    assert thick.silent == thin.silent == 0
    assert thick.within_1_percent >= 0.93
    assert thick.median_error <= 0.002
    assert thick.covered >= 0.80
    assert thin.covered >= 0.70
