"""What the command line refuses: one line a fault on standard error, status 2, never a traceback."""

import json
import os
import signal
import subprocess
import sys
import time

import pytest

PROGRAM = [sys.executable, "-W", "error", "-m", "filmfit"]


def run(*arguments, cwd, stdout=subprocess.PIPE, **environment):
    return subprocess.run(
        [*PROGRAM, *arguments], cwd=cwd, stdout=stdout, stderr=subprocess.PIPE, text=True, timeout=300, check=False,
        env={**os.environ, "OPENBLAS_NUM_THREADS": "1", **environment},
    )  # fmt: skip


def refused(told, line, status=2):
    assert told.returncode == status
    assert told.stderr.splitlines() == [line]


@pytest.mark.parametrize(
    ("arguments", "line"),
    [
        ([], "filmfit: no command given; allowed: fit, materials, new, next, rate, runs, trend; see 'filmfit --help'"),
        (["runs"], "filmfit runs: no command given; allowed: amend, backup, check, confirm, event, export, import, leave-out, list, show; see 'filmfit runs --help'"),
        (["--verson"], "filmfit: No such option '--verson'. Did you mean '--version'?; see 'filmfit --help'"),
        (["fit"], "filmfit fit: Missing argument 'RUN.toml...'; see 'filmfit fit --help'"),
        (["fit", "x.toml", "--map", "m.csv"], "filmfit fit: --map is not supported yet; see 'filmfit fit --help'"),
        (["fit", "x.toml", "--cluster", "a:1"], "filmfit fit: --cluster is not supported yet; see 'filmfit fit --help'"),
        (["fit", "x.toml", "--no-records", "--json", "no/x.json"], "no/x.json: there is no folder 'no'; make it, or name another file"),
        (["fit", "x.toml", "--no-records", "--json", "."], ".: is a folder; name a file in it"),
        (["fit", "x.toml", "--records", "nosuch://x"], "nosuch://x: no driver for 'nosuch'; install it, or give a file name"),
        (["fit", ".", "--no-records"], ".: is a folder; name the run file in it"),
        (["runs", "list", "--last", "0"], "filmfit runs list: Invalid value for '--last': 0 is not in the range x>=1; see 'filmfit runs list --help'"),
        (
            ["runs", "list", "--records", "sqlite:///none.sqlite"],
            "sqlite:///none.sqlite: no such records; file a run with 'filmfit fit', or name them with --records",
        ),
        (["runs", "show", "K2-1", "--records", "."], ".: is a folder; name a file in it"),
    ],
)  # fmt: skip
def test_wrong_use_is_one_line_and_leaves_nothing_behind(tmp_path, arguments, line):
    told = run(*arguments, cwd=tmp_path)
    refused(told, line)
    assert told.stdout == ""
    assert not list(tmp_path.iterdir())


def test_a_report_folder_that_cannot_be_made_is_refused_before_anything_is_done(tmp_path, example):
    told = run("fit", example / "run.toml", "--report", example / "run.toml" / "x", cwd=tmp_path)
    refused(told, f"{example}/run.toml/x: cannot be made: Not a directory; name another folder")
    assert not (tmp_path / "filmfit-records.sqlite").exists()


def test_a_picture_that_cannot_be_written_does_not_cost_the_fit(tmp_path, example):
    (tmp_path / "C1-0231-fit.svg").mkdir()
    told = run("fit", example / "run.toml", "--quiet", "--json", "out.json", cwd=tmp_path)
    refused(told, "C1-0231-fit.svg: cannot be written: Is a directory; name another place")
    assert told.stdout.startswith("C1-0231: usable")
    assert json.loads((tmp_path / "out.json").read_text())["answer"] == "usable"
    assert json.loads(run("runs", "list", "--json", "-", cwd=tmp_path).stdout)["runs"][0]["fits"] == 1


def test_an_unknown_run_is_refused_with_the_nearest_one(tmp_path, example):
    assert run("fit", example / "run.toml", "--quiet", cwd=tmp_path).returncode == 0
    told = run("runs", "show", "C1-0213", cwd=tmp_path)
    refused(told, "filmfit-records.sqlite: no run 'C1-0213'; did you mean 'C1-0231'?")


def test_faults_of_a_run_leave_standard_output_pure_json(tmp_path):
    told = run("fit", "a.toml", "b.toml", "--no-records", "--json", "-", cwd=tmp_path)
    assert told.returncode == 2
    assert [one["run"] for one in json.loads(told.stdout)] == ["a", "b"]
    assert told.stderr.splitlines() == [
        f"{name}: no such file; write one with 'filmfit new'" for name in ("a.toml", "b.toml")
    ]


def test_a_file_name_that_is_no_text_is_told_and_written_as_json(tmp_path):
    name = os.fsdecode(b"\xff.toml")
    told = run("fit", name, "--no-records", "--json", "out.json", cwd=tmp_path)
    refused(told, "?.toml: no such file; write one with 'filmfit new'")
    assert json.loads((tmp_path / "out.json").read_text())["error"]["found"] == "no such file"


def test_control_characters_of_a_run_file_do_not_reach_the_terminal(tmp_path):
    (tmp_path / "run.toml").write_text('format = 1\n"\\u001b[2Jkey" = 1\n')
    told = run("fit", "run.toml", "--no-records", cwd=tmp_path)
    assert told.returncode == 2
    assert "\x1b" not in told.stderr
    assert "?[2Jkey: unknown key" in told.stderr


@pytest.mark.skipif(not os.path.exists("/dev/full"), reason="this system has no /dev/full")
@pytest.mark.parametrize("arguments", [["materials", "list"], ["fit", "a.toml", "--no-records", "--json", "-"]])
def test_a_full_disk_is_told(tmp_path, arguments):
    with open("/dev/full", "w") as full:
        told = run(*arguments, cwd=tmp_path, stdout=full)
    assert told.returncode == 2
    assert told.stderr.splitlines()[-1] == "standard output: cannot be written: No space left on device"
    assert "Traceback" not in told.stderr
    assert "Exception" not in told.stderr


def test_a_file_that_fails_unforeseen_is_told_by_its_name(monkeypatch, capsys):
    from filmfit.cli import main

    def fail(**_):
        raise PermissionError(13, "Permission denied", "a.csv")

    monkeypatch.setattr(main.cli, "main", fail)
    with pytest.raises(SystemExit) as left:
        main.main(["materials", "list"])
    assert left.value.code == 2
    assert capsys.readouterr().err == "a.csv: cannot be used: Permission denied\n"


@pytest.mark.skipif(os.name == "nt", reason="pipes close in another way there")
def test_a_reader_that_has_gone_ends_the_program_silently(tmp_path):
    reading, writing = os.pipe()
    os.close(reading)
    told = run("materials", "list", cwd=tmp_path, stdout=writing)
    os.close(writing)
    assert (told.returncode, told.stderr) == (141, "")


@pytest.mark.skipif(os.name == "nt", reason="SIGINT is another thing there")
def test_ctrl_c_is_one_line_and_status_130(tmp_path, example):
    def heed_ctrl_c():
        signal.signal(signal.SIGINT, signal.default_int_handler)  # a job in the background is born deaf to it

    with subprocess.Popen(
        [*PROGRAM, "fit", *[example / "run.toml"] * 50, "--quiet", "--no-records"], cwd=tmp_path, text=True,
        stdout=subprocess.PIPE, stderr=subprocess.PIPE, preexec_fn=heed_ctrl_c,
    ) as program:  # fmt: skip
        assert program.stdout.readline().startswith("C1-0231: usable")
        time.sleep(0.05)
        program.send_signal(signal.SIGINT)
        _, told = program.communicate(timeout=60)
    assert program.returncode == 130
    assert told.strip() == "filmfit: stopped by the keyboard; what was filed before is kept"


@pytest.mark.parametrize(
    ("name", "run_id"),
    [
        ("K2-9.toml", "K2-9"),
        ("my \"run'.toml", "my-run"),
        ("-.toml", "run"),
        ("\N{GREEK SMALL LETTER ALPHA} 7.toml", "7"),
    ],
)
def test_new_writes_an_id_that_a_fit_accepts(tmp_path, name, run_id):
    assert run("new", "--", name, cwd=tmp_path).returncode == 0
    assert f'id = "{run_id}"' in (tmp_path / name).read_text(encoding="utf-8")
    told = run("fit", "--no-records", "--", name, cwd=tmp_path)
    assert [line.partition(": ")[2] for line in told.stderr.splitlines()] == [
        f"spectrum[{number}].file: no file '{file}' in ." for number, file in ((1, "t.csv"), (2, "r.csv"))
    ]


@pytest.mark.skipif(os.name == "nt", reason="links need rights there")
def test_new_does_not_write_through_a_link(tmp_path):
    (tmp_path / "run.toml").symlink_to("elsewhere.toml")
    refused(run("new", cwd=tmp_path), "run.toml: is there already; name another file")
    assert not (tmp_path / "elsewhere.toml").exists()
