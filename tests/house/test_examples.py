"""The README's first block and the example's own script."""

import os
import shlex
import subprocess
import sys
from pathlib import Path


def test_the_example_data_are_made_by_the_script_beside_them(tmp_path, checkout):
    folder = checkout / "examples" / "first-run"
    subprocess.run([sys.executable, folder / "make_data.py", tmp_path], check=True)
    for name in ("scan.csv", "bare.csv"):
        assert (tmp_path / name).read_bytes() == (folder / name).read_bytes()
    assert "filmfit" not in [
        line.split()[1].split(".")[0]
        for line in (folder / "make_data.py").read_text().splitlines()
        if line.startswith(("import", "from"))
    ]


def test_the_first_block_of_the_readme(tmp_path, checkout):
    block = (checkout / "README.md").read_text().split("```bash\n")[1].partition("```")[0].strip().splitlines()
    here = Path(sys.executable).parent
    (tmp_path / "examples").symlink_to(checkout / "examples")
    for line in block:
        words = shlex.split(line)
        if words[0] == "python3" or "pip" in words[0]:
            continue  # the environment that runs this test is the one they make
        told = subprocess.run(
            [here / Path(words[0]).name, *words[1:]], cwd=tmp_path, capture_output=True, text=True, check=False,
            env={**os.environ, "OPENBLAS_NUM_THREADS": "1"},
        )  # fmt: skip
        assert told.returncode == 0, told.stderr
        assert "C1-0231" in told.stdout
    assert (tmp_path / "filmfit-records.sqlite").stat().st_size > 0
    assert (tmp_path / "C1-0231-fit.svg").stat().st_size > 0
