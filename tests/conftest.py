"""Shared fixtures: the command line in a process of its own, studies, the demo run."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import settings

settings.register_profile("repeatable", derandomize=True)
if os.environ.get("CI"):  # the same examples in every run; without it every run looks for new ones
    settings.load_profile("repeatable")

Cli = Callable[..., "subprocess.CompletedProcess[str]"]


@pytest.fixture(scope="session")
def cli() -> Cli:
    """Return a function that runs the command line in a new process."""

    def call(*args: str | Path, cwd: Path | None = None) -> subprocess.CompletedProcess[str]:
        code = "from reports.cli import main; main()"
        env = {**os.environ, "OMP_NUM_THREADS": "1", "COLUMNS": "100", "NO_COLOR": "1", "TERM": "dumb"}
        return subprocess.run(
            [sys.executable, "-W", "error", "-c", code, *map(str, args)],
            capture_output=True,
            text=True,
            cwd=cwd,
            env=env,
            check=False,
            timeout=300,
        )

    return call
