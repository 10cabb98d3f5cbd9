"""The command line by exit code and text: help, starter, check, and one short message for bad input."""

from __future__ import annotations

import os
import re
import signal
import subprocess
import sys
from pathlib import Path

import pytest

from reports.cli import exit_code
from reports.studyfiles import study_text
from tests.conftest import Cli

COMMANDS = ("demo", "new", "check", "run", "coverings", "weather", "bands")


def _study(tmp_path: Path, text: str, name: str = "study.toml") -> Path:
    path = tmp_path / name
    path.write_text(text, encoding="utf-8")
    return path


def _refused(done: subprocess.CompletedProcess[str], *parts: str) -> str:
    said = done.stderr.strip()
    assert done.returncode == 2, (done.returncode, done.stdout, done.stderr)
    assert "Traceback" not in said
    progress, said = said.splitlines()[:-1], said.splitlines()[-1]
    assert all(re.fullmatch(r" *\d+\.\d s  .*", line) for line in progress), progress
    assert said.startswith("canopy-budget: ")
    assert len(said) < 400
    for part in parts:
        assert part in said, (part, said)
    return said


def test_help_names_every_command(cli: Cli) -> None:
    done = cli("--help")
    assert done.returncode == 0
    for name in COMMANDS:
        assert f" {name} " in done.stdout
    for name in COMMANDS:
        assert exit_code([name, "--help"]) == 0


@pytest.mark.parametrize("args", [["--help"], ["check", "STARTER"]])
def test_light_commands_import_nothing_heavy(tmp_path: Path, args: list[str]) -> None:
    starter = _study(tmp_path, study_text("starter"))
    args = [str(starter) if a == "STARTER" else a for a in args]
    code = (
        "import sys\n"
        "from reports.cli import app\n"
        f"try:\n    app({args!r})\nexcept SystemExit as end:\n    assert not end.code, end.code\n"
        "heavy = {'pandas', 'pvlib', 'plotly', 'scipy'} & set(sys.modules)\n"
        "assert not heavy, heavy\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr


def test_new_writes_a_study_that_check_accepts_and_keeps_existing_files(cli: Cli, tmp_path: Path) -> None:
    path = tmp_path / "my.toml"
    assert cli("new", path).returncode == 0
    done = cli("check", path)
    assert done.returncode == 0, done.stderr
    assert "3 candidates" in done.stdout
    path.write_text("mine", encoding="utf-8")
    _refused(cli("new", path), "exists already")
    assert path.read_text(encoding="utf-8") == "mine"


def test_demo_study_is_in_order(cli: Cli, tmp_path: Path) -> None:
    done = cli("check", _study(tmp_path, study_text("demo")))
    assert done.returncode == 0, done.stderr
    assert "5 candidates" in done.stdout


BAD = {
    "unknown key": ("spans = 10", "spanz = 10", ["house -> spanz", 'did you mean "spans"']),
    "wrong type": ("spans = 10", 'spans = "ten"', ["house -> spans", '"ten"', "a whole number, 1 to 200"]),
    "out of range": (
        "gutter_height = 4.5",
        "gutter_height = 45",
        ["gutter_height: found 45; allowed is 0 to 12 m"],
    ),
    "true for a number": ("spans = 10", "spans = true", ["house -> spans", "true"]),
    "not a number": (
        "length = 60.0",
        "length = nan",
        ["length: found nan; allowed is 3 to 1000 m"],
    ),
    "unknown covering": ("glass-clear-4", "glas-clear-4", ['"glas-clear-4"', 'did you mean "glass-clear-4"']),
    "unknown screen": ('["night screen"]', '["nite screen"]', ["screens", 'did you mean "night screen"']),
    "one name twice": (
        'name = "single glass, night screen"',
        'name = "Single glass"',
        ["candidate", "two are called"],
    ),
    "swapped": (
        "latitude = 36.1               # degrees, north is positive\nlongitude = -79.95",
        "latitude = -79.95\nlongitude = 36.1",
        ["site -> latitude", "look swapped"],
    ),
    "bad date": ('["03-10", 3.0]', '["02-30", 3.0]', ["crop -> leaf_area_index", "02-30", "MM-DD"]),
    "bad season value": ('["03-10", 3.0]', '["03-10", 30.0]', ["crop -> leaf_area_index", "outside 0 to 10"]),
    "missing weather": ('shipped = "greensboro"', 'file = "none.epw"', ["none.epw", "no such file"]),
    "no weather source": ('shipped = "greensboro"', "", ["weather", "one of file, files, shipped"]),
    "unknown shipped year": ('"greensboro"', '"greensburo"', ['did you mean "greensboro"']),
    "broken toml": ("[house]", "[house", ["not valid TOML", "line"]),
    "pitch on an arch": ("rise = 1.9", "pitch = 20.0", ["house", "rise"]),
    "unknown zone": ("America/New_York", "America/New_Yrok", ["site -> timezone", "America/New_York"]),
}


@pytest.mark.parametrize("case", BAD)
def test_bad_studies_end_with_one_short_message(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], case: str
) -> None:
    old, new, parts = BAD[case]
    text = study_text("starter")
    assert old in text
    path = _study(tmp_path, text.replace(old, new, 1))
    out = tmp_path / "out"
    for args in (["check", str(path)], ["run", str(path), "--out", str(out)]):
        code = exit_code(args)
        said = capsys.readouterr()
        _refused(subprocess.CompletedProcess(args, code, said.out, said.err), *parts)
    assert not out.exists()


def test_a_bad_study_from_the_shell(cli: Cli, tmp_path: Path) -> None:
    path = _study(tmp_path, study_text("starter").replace("spans = 10", "spanz = 10", 1))
    _refused(cli("check", path), "house -> spanz")
    _refused(cli("run", path, "--out", tmp_path / "out"), "house -> spanz")
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    ("blob", "part"),
    [
        (b"\xff\xfe title", "not UTF-8"),
        (b"a = " + b"[" * 60_000, "nested too deep"),
        (b"", "weather"),
        (b"x = 1", "unknown key"),
    ],
)
def test_files_that_are_no_study(cli: Cli, tmp_path: Path, blob: bytes, part: str) -> None:
    path = tmp_path / "odd.toml"
    path.write_bytes(blob)
    _refused(cli("check", path), part)


def test_missing_and_special_files(cli: Cli, tmp_path: Path) -> None:
    _refused(cli("check", tmp_path / "absent.toml"), "no such file")
    _refused(cli("check", tmp_path), "no regular file")
    os.mkfifo(tmp_path / "pipe.toml")
    _refused(cli("check", tmp_path / "pipe.toml"), "no regular file")


def test_output_that_cannot_be_written(cli: Cli, tmp_path: Path) -> None:
    blocked = tmp_path / "taken"
    blocked.write_text("a file", encoding="utf-8")
    _refused(cli("demo", "--out", blocked), "taken")
    assert blocked.read_text(encoding="utf-8") == "a file"
    _refused(cli("demo", "--out", blocked / "inner"), "inner")


def test_unreadable_weather_file(cli: Cli, tmp_path: Path) -> None:
    (tmp_path / "noise.epw").write_bytes(bytes(range(256)) * 20)
    text = study_text("starter").replace('shipped = "greensboro"', 'file = "noise.epw"')
    path = _study(tmp_path, text)
    _refused(cli("run", path, "--out", tmp_path / "out"), "noise.epw")
    assert not (tmp_path / "out").exists()


def test_bands_of_black_surfaces(cli: Cli) -> None:
    # peak 9.659 µm at 300 K: Wien's law, CODATA 2018; share 8-14 µm .37574: Planck's law by quadrature
    done = cli("bands", "--temperature", "300", "--edges", "8,14")
    assert done.returncode == 0, done.stderr
    assert "9.6592 µm" in done.stdout
    assert "0.37574" in done.stdout
    _refused(cli("bands", "--temperature", "-5"), "--temperature")
    _refused(cli("bands", "--temperature", "300", "--edges", "14,8"), "rise")
    _refused(cli("bands", "--temperature", "300", "--edges", "8,x"), "'x'")


USAGE = {
    "no such command": (["chek", "x.toml"], ["chek", "--help"]),
    "no output folder": (["run", "x.toml"], ["run: missing option '--out'", "canopy-budget run --help"]),
    "no file": (["check"], ["check: missing argument"]),
    "no such option": (["check", "x.toml", "--quick"], ["--quick"]),
    "not a number": (["bands", "--temperature", "warm"], ["--temperature"]),
    "one too many": (["check", "a", "b"], ["(b)"]),
    "empty folder": (["demo", "--out", ""], ["--out", "name a folder"]),
    "nothing to plot": (["coverings", "--plot", "x.html"], ["--plot"]),
    "a name too long": (["weather", "x" * 300], ["longer than the system allows"]),
    "unknown covering": (["coverings", "glass-cleer-4"], ['did you mean "glass-clear-4"']),
}


@pytest.mark.parametrize("case", USAGE)
def test_wrong_command_lines_end_with_one_line(capsys: pytest.CaptureFixture[str], case: str) -> None:
    args, parts = USAGE[case]
    code = exit_code(args)
    said = capsys.readouterr()
    _refused(subprocess.CompletedProcess(args, code, said.out, said.err), *parts)


def test_no_arguments_show_the_help(cli: Cli) -> None:
    done = cli()
    assert done.returncode == 0
    assert "Usage" in done.stdout


def test_names_that_a_terminal_cannot_show(tmp_path: Path) -> None:
    """Spaces, signs beyond ASCII and bytes that are no text in a path; a terminal that knows ASCII only."""
    name = os.fsencode(tmp_path) + b"/a b \xe2\x98\x83 \xff.toml"
    Path(os.fsdecode(name)).write_text(study_text("starter"), encoding="utf-8")
    for coding in ("utf-8", "ascii"):
        done = subprocess.run(
            [sys.executable, "-c", "from reports.cli import main; main()", "check", name],
            capture_output=True,
            env={**os.environ, "PYTHONIOENCODING": coding},
            check=False,
        )
        assert done.returncode == 0, done.stderr
        assert b"in order. My coverings" in done.stdout


@pytest.mark.parametrize("sign", [signal.SIGINT, signal.SIGTERM])
def test_a_stopped_run_leaves_nothing(tmp_path: Path, sign: signal.Signals) -> None:
    path = _study(tmp_path, study_text("demo"))
    command = [sys.executable, "-c", "from reports.cli import main; main()", "run", path, "--out", "out/in"]
    with subprocess.Popen(command, cwd=tmp_path, stdout=-1, stderr=-1, text=True) as process:
        assert process.stderr is not None
        process.stderr.readline()  # the first stage is under way
        process.send_signal(sign)
        _, said = process.communicate(timeout=60)
    assert process.returncode == 130
    assert said.splitlines()[-1] == "canopy-budget: stopped; nothing was written"
    assert [p.name for p in tmp_path.iterdir()] == [path.name]


def test_a_reader_that_goes_away(tmp_path: Path) -> None:
    path = _study(tmp_path, study_text("starter"))
    read, write = os.pipe()
    os.close(read)
    command = [sys.executable, "-c", "from reports.cli import main; main()", "check", path]
    done = subprocess.run(command, stdout=write, stderr=subprocess.PIPE, text=True, check=False)
    os.close(write)
    assert done.returncode == 141
    assert done.stderr == ""


def test_a_disk_that_is_full(tmp_path: Path) -> None:
    path = _study(tmp_path, study_text("starter"))
    command = [sys.executable, "-c", "from reports.cli import main; main()", "check", path]
    with open("/dev/full", "w", encoding="utf-8") as full:
        done = subprocess.run(command, stdout=full, stderr=subprocess.PIPE, text=True, check=False)
    assert done.returncode == 2
    assert "no space left" in done.stderr


def test_a_bug_says_so(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    import reports.check_view
    from reports.cli import main

    def broken(path: Path) -> str:
        raise ZeroDivisionError

    monkeypatch.setattr(reports.check_view, "check_text", broken)
    monkeypatch.setattr(sys, "argv", ["canopy-budget", "check", "x.toml"])
    with pytest.raises(SystemExit) as end:
        main()
    assert end.value.code == 1
    assert "this is a bug" in capsys.readouterr().err
