"""The start of the program: what it loads and what that costs, as a ratio within one run.

The ratio of `filmfit --help` stands in test_ratios.py; here is what keeps it so.
"""

import subprocess
import sys

import pytest

HEAVY = ("numpy", "scipy", "pydantic", "rich", "sqlalchemy", "alembic", "matplotlib", "lmfit", "tmm", "tree_sitter")


def loaded_after(code):
    told = subprocess.run(
        [sys.executable, "-c", f"import sys\n{code}\nprint('\\nloaded:', *[n for n in {HEAVY} if n in sys.modules])"],
        capture_output=True, text=True, check=True,
    )  # fmt: skip
    return told.stdout.rpartition("loaded:")[2].split()


@pytest.mark.parametrize("arguments", [["--help"], ["fit", "--help"], ["runs", "list", "--help"], ["--version"]])
def test_help_loads_nothing_heavy(arguments):
    call = f"import filmfit.cli.main as m\ntry:\n    m.main({arguments})\nexcept SystemExit:\n    pass"
    assert loaded_after(call) == []


def test_a_wrong_word_is_refused_without_loading_anything_heavy():
    call = "import filmfit.cli.main as m\ntry:\n    m.main(['fti'])\nexcept SystemExit:\n    pass"
    assert loaded_after(call) == []


def test_text_loads_neither_the_database_nor_the_pictures():
    assert set(loaded_after("import filmfit.report.text")) <= {"pydantic"}


def test_the_list_of_heavy_packages_is_seen():
    assert "numpy" in loaded_after("import numpy")
