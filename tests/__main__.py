"""Run every check of the project: lint, format, types, tests, benchmarks. Usage: python -m tests"""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
TOOLS = {"chromium": "chromium", "soffice": "libreoffice-calc-nogui"}
STEPS = (
    ("lint", ["ruff", "check", "."]),
    ("format", ["ruff", "format", "--check", "."]),
    ("types", ["mypy"]),
    ("tests", ["pytest", "-q", "-n", "2", "--dist", "loadfile", "--ignore", "tests/benchmarks"]),
    ("benchmarks", ["pytest", "-q", "tests/benchmarks"]),
)


def _ensure_tools() -> None:
    absent = [package for tool, package in TOOLS.items() if shutil.which(tool) is None]
    if not absent:
        return
    apt = shutil.which("apt-get")
    if apt is None or os.geteuid() != 0:
        sys.exit(f"the tests open the report and the workbook; install first: {' '.join(absent)}")
    subprocess.run([apt, "-qq", "update"], check=True)
    env = {**os.environ, "DEBIAN_FRONTEND": "noninteractive"}
    subprocess.run([apt, "-qq", "-y", "install", *absent], check=True, env=env, stdout=subprocess.DEVNULL)


def main() -> int:
    """Run the steps in order; the first that fails ends the run with its code."""
    _ensure_tools()
    env = {**os.environ, "OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1"}
    for title, command in STEPS:
        print(f"== {title}: {' '.join(command)}", flush=True)
        code = subprocess.run([sys.executable, "-m", *command], cwd=ROOT, env=env, check=False).returncode
        if code:
            print(f"== {title} failed with exit code {code}", flush=True)
            return code
    print("== all checks passed", flush=True)
    return 0


if __name__ == "__main__":
    sys.exit(main())
