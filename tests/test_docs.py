"""README and DEVELOPERS agree with the code: tables of keys and columns, commands, imports, the wheel."""

from __future__ import annotations

import ast
import re
import subprocess
import sys
import tomllib
import zipfile
from pathlib import Path

import pytest

from canopy.cautions import CAUTIONS
from canopy.columns import COLUMNS, DAILY
from canopy.studyfile import build_study
from tests import columns_table, study_keys
from tests.conftest import Cli

ROOT = Path(__file__).resolve().parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
ROOMS = {"weather": {"weather"}, "canopy": {"weather", "canopy"}, "reports": {"weather", "canopy", "reports"}}


def test_every_study_key_stands_in_the_readme() -> None:
    assert study_keys.markdown() in README


def test_every_column_stands_in_developers() -> None:
    assert columns_table.table() in DEVELOPERS


def test_the_identity_in_the_readme_names_every_term() -> None:
    for column in COLUMNS:
        if column.part:
            assert column.name.removesuffix("_w_m2") in README, column.name


def test_column_names_end_in_their_unit() -> None:
    tails = ("_w_m2", "_umol_m2_s", "_c", "_k", "_pct", "_kpa", "_kg_m2_h", "_per_h", "_share", "_m2_m2")
    assert all(column.name.endswith(tails) for column in COLUMNS)
    names = [name for name, _, _ in DAILY]
    assert len(set(names)) == len(names)


def test_every_caution_stands_in_the_readme() -> None:
    flat = " ".join(README.split())
    for caution in CAUTIONS:
        assert " ".join(caution.split()) in flat


def test_the_study_in_the_readme_is_in_order() -> None:
    text = next(t for t in re.findall(r"```toml\n(.*?)```", README, re.S) if "[[candidate]]" in t)
    study = build_study(tomllib.loads(text), ROOT, "README", text.encode())
    assert len(study.plans) == 2


def test_the_demo_in_the_readme_is_what_the_demo_prints(cli: Cli, tmp_path: Path) -> None:
    printed = re.search(r"```text\n(.*?)```", README, re.S)
    assert printed is not None
    done = cli("demo", "--out", tmp_path / "demo")
    assert done.returncode == 0, done.stderr
    shown = [line.rstrip() for line in printed[1].strip().splitlines()]
    said = [line.rstrip() for line in done.stdout.strip().splitlines()]
    assert said[: len(shown)] == shown


def test_commands_in_the_readme_exist(cli: Cli) -> None:
    listed = cli("--help").stdout
    for name in re.findall(r"`canopy-budget ([a-z]+)", README):
        assert f" {name} " in listed


def _imports(path: Path) -> set[str]:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    found: set[str] = set()
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            found |= {alias.name.split(".")[0] for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module and node.level == 0:
            found.add(node.module.split(".")[0])
    return found


@pytest.mark.parametrize("room", ROOMS)
def test_imports_run_one_way(room: str) -> None:
    for path in sorted((ROOT / room).rglob("*.py")):
        assert _imports(path) & set(ROOMS) <= ROOMS[room], path


def test_modules_and_functions_stay_small() -> None:
    for room in ROOMS:
        for path in sorted((ROOT / room).rglob("*.py")):
            text = path.read_text(encoding="utf-8")
            assert text.count("\n") <= 400, path
            for node in ast.walk(ast.parse(text)):
                if isinstance(node, ast.FunctionDef):
                    assert (node.end_lineno or 0) - node.lineno < 60, (path, node.name)


def test_the_wheel_holds_the_three_rooms_and_their_data(tmp_path: Path) -> None:
    command = [sys.executable, "-m", "pip", "wheel", "-q", "--no-deps", "-w", str(tmp_path), str(ROOT)]
    subprocess.run(command, check=True, capture_output=True)
    (wheel,) = tmp_path.glob("*.whl")
    names = zipfile.ZipFile(wheel).namelist()
    assert {name.split("/")[0] for name in names if ".dist-info" not in name} == set(ROOMS)
    for wanted in ("reports/studies/demo.toml", "canopy/data/library/coverings.toml", "canopy/py.typed"):
        assert wanted in names
