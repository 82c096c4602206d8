"""A plate whose own fringes are seen: too thin, or looked at through too narrow a slit."""

import re

import pytest

from filmfit.jobs.fit import fit_run


@pytest.mark.parametrize(
    ("change", "seen"),
    [
        ((r"thickness_mm = [\d.]+", "thickness_mm = 0.1"), True),
        ((r"\Z", "\n[instrument]\nslit_nm = 0.2\n"), True),
        ((r"\Z", "\n[instrument]\nslit_nm = 2\n"), False),
    ],
)
def test_fringes_of_the_plate_ask_for_a_look(example, change, seen):
    path = example / "run.toml"
    text = re.sub(r"\[instrument\][^\[]*", "", path.read_text())
    path.write_text(re.sub(*change, text, count=1))
    codes = [one.code for one in fit_run(path).result.reasons]
    assert ("foil-substrate" in codes) == seen
