"""Make films, measure them with faults, fit them, and count how often the answer is right."""

import pytest

from tests.recovery.scores import outcomes_of, table


@pytest.fixture(scope="session")
def recover(tmp_path_factory):
    """Return a function that makes and fits cases of given seeds, once for each range, and scores them by group."""
    known = {}

    def run(seeds):
        if seeds not in known:
            known[seeds] = table(outcomes_of(tmp_path_factory.mktemp("made"), seeds))
        return known[seeds]

    return run
