"""The example's data come from the script beside them, which states what is true."""

import ast
import re
import subprocess
import sys

import pytest

from filmfit.quantities import carriers


@pytest.fixture(scope="module")
def remade(tmp_path_factory, checkout):
    """A folder with the data made anew, and what the script printed."""
    folder = tmp_path_factory.mktemp("remade")
    script = checkout / "examples" / "first-run" / "make_data.py"
    told = subprocess.run([sys.executable, script, folder], check=True, capture_output=True, text=True)
    pairs = (line.split(" = ") for line in told.stdout.splitlines())
    return folder, {name: float(value) for name, value in pairs}


@pytest.mark.parametrize("name", ["scan.csv", "bare.csv"])
def test_the_same_bytes_come_out(remade, checkout, name):
    assert (remade[0] / name).read_bytes() == (checkout / "examples" / "first-run" / name).read_bytes()


def test_the_script_uses_no_filmfit(checkout):
    parsed = ast.parse((checkout / "examples" / "first-run" / "make_data.py").read_text())
    imported = {one.name for node in ast.walk(parsed) if isinstance(node, ast.Import) for one in node.names}
    imported |= {node.module for node in ast.walk(parsed) if isinstance(node, ast.ImportFrom)}
    assert imported == {"sys", "pathlib", "numpy", "tmm"}


def test_the_true_values_are_those_of_the_head_and_of_the_carrier_formulas(remade, checkout):
    _, true = remade
    head = ast.get_docstring(ast.parse((checkout / "examples" / "first-run" / "make_data.py").read_text()))
    stated = {float(word) for word in re.findall(r"\d+(?:\.\d+)?(?:e\d+)?", head.partition("True values:")[2])}
    for name, value in true.items():
        assert value in stated, name
    plasma, damping = true["plasma_energy_eV"], true["damping_eV"]
    # four digits are printed
    assert carriers.carrier_density_cm3(plasma, 0.35) == pytest.approx(true["carrier_density_cm3"], rel=1e-4)
    assert carriers.mobility_cm2_Vs(damping, 0.35) == pytest.approx(true["mobility_cm2_Vs"], rel=2e-4)
    sheet = carriers.resistivity_ohm_cm(plasma, damping) / (true["thickness_nm"] * 1e-7)
    assert sheet == pytest.approx(true["sheet_resistance_ohm"], rel=4e-4)
