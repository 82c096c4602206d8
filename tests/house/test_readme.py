"""The pages for users and contributors: their commands run, and what they name exists."""

import os
import re
import shlex
import subprocess
import sys
from pathlib import Path

import pytest

import filmfit

PACKAGE = Path(filmfit.__file__).parent


def blocks(checkout):
    """Return the lines of each fenced bash block of the README."""
    parts = (checkout / "README.md").read_text(encoding="utf-8").split("```bash\n")[1:]
    return [part.partition("```")[0].strip().splitlines() for part in parts]


def test_the_first_block_leaves_a_record_and_a_picture(tmp_path, checkout):
    here = Path(sys.executable).parent
    (tmp_path / "examples").symlink_to(checkout / "examples")
    ran = 0
    for line in blocks(checkout)[0]:
        words = shlex.split(line)
        if words[0] == "python3" or "pip" in words[0]:
            continue  # the environment that runs this test is the one they make
        told = subprocess.run(
            [here / Path(words[0]).name, *words[1:]], cwd=tmp_path, capture_output=True, text=True, check=False,
            env={**os.environ, "OPENBLAS_NUM_THREADS": "1"},
        )  # fmt: skip
        assert told.returncode == 0, told.stderr
        assert "C1-0231" in told.stdout
        ran += 1
    assert ran >= 1
    assert (tmp_path / "filmfit-records.sqlite").stat().st_size > 0
    assert (tmp_path / "C1-0231-fit.svg").stat().st_size > 0


def test_two_blocks_that_begin_on_a_fresh_machine(checkout):
    found = blocks(checkout)
    assert len(found) == 2
    assert found[0][0] == found[1][0] == "python3 -m venv .venv"
    assert any("pip install" in line and line.endswith(" .") for line in found[0])
    assert any("pip install" in line and "'.[test,lint]'" in line for line in found[1])


def test_readme_and_ci_call_the_same_tests(checkout):
    command = shlex.split(blocks(checkout)[1][-1])
    last = (checkout / ".ci" / "run").read_text(encoding="utf-8").strip().splitlines()[-1]
    assert Path(command[0]).name == "pytest"
    # the last line of the check, so that pytest's closing line is the last one printed
    assert [Path(word).name for word in shlex.split(last)[:1]] + shlex.split(last)[1:] == ["pytest", *command[1:]]


@pytest.mark.parametrize("script", ["run", "full"])
def test_the_checks_are_strict_and_executable(checkout, script):
    path = checkout / ".ci" / script
    assert os.access(path, os.X_OK)
    assert "set -euo pipefail" in path.read_text(encoding="utf-8").splitlines()
    assert subprocess.run(["bash", "-n", path], check=False).returncode == 0


@pytest.mark.parametrize("page", ["README.md", "DEVELOPERS.md"])
def test_every_file_that_a_page_names_exists(checkout, page):
    text = (checkout / page).read_text(encoding="utf-8")
    named = set(re.findall(r"`((?:[\w.-]+/)*[\w-]+\.(?:py|toml)|(?:[\w.-]+/)+(?:run|full)?)`", text))
    if page == "DEVELOPERS.md":
        assert len(named) > 20
    named -= {"run.toml"}  # the user's own
    missing = [one for one in sorted(named) if not _exists(checkout, one)]
    assert missing == []


def _exists(checkout, named):
    """Say whether a page's name is a file or folder of the checkout, the package, or, bare, of one of its rooms."""
    if (checkout / named).exists() or (PACKAGE / named).exists():
        return True
    return "/" not in named and any(PACKAGE.rglob(named))
