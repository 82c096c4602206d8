"""Made films with a blunder at the bench: the blunder is named, or the number is right; an honest film is not accused."""

import numpy as np
import pytest

from filmfit.errors import Faults


def scan(path):
    head, *rows = path.read_text().splitlines()
    return head, np.array([[float(cell) for cell in row.split(",")] for row in rows])


def write(path, head, rows):
    path.write_text(head + "\n" + "\n".join(",".join(f"{v:.5f}" for v in row) for row in rows))


def test_a_sample_turned_over_is_found(example):
    from filmfit.jobs.fit import fit_run

    path = example / "run.toml"
    path.write_text(path.read_text().replace('side = "film"', 'side = "substrate"'))
    result = fit_run(path).result
    assert result.answer != "usable"
    assert "side-may-be-swapped" in [one.code for one in result.reasons]


def test_transmittance_against_a_plate_is_found(example):
    from filmfit.jobs.fit import fit_run

    head, rows = scan(example / "scan.csv")
    _, bare = scan(example / "bare.csv")
    rows[:, 1] *= 100 / bare[:, 1]
    write(example / "scan.csv", head, rows)
    # where the film is clear R + T exceeds 1, and the job does not begin
    with pytest.raises(Faults, match="100 % line"):
        fit_run(example / "run.toml")
    # where it absorbs the sum tells nothing, and the fit must
    keep = rows[:, 0] > 900
    write(example / "scan.csv", head, rows[keep])
    result = fit_run(example / "run.toml").result
    assert result.answer != "usable"
    assert "reference-may-be-a-plate" in [one.code for one in result.reasons]


@pytest.mark.parametrize(
    "code", ["side-may-be-swapped", "back-may-be-blackened", "reference-may-be-a-plate", "reflectance-may-be-squared"]
)
def test_an_honest_film_is_not_accused(example, code):
    from filmfit.jobs.fit import fit_run

    assert code not in [one.code for one in fit_run(example / "run.toml").result.reasons]
