"""Open data for the weather tests: pvlib's source distribution, fetched once per machine, never committed."""

from __future__ import annotations

import shutil
import subprocess
import sys
import tarfile
import tempfile
from importlib.metadata import version
from pathlib import Path

import pytest

WANTED = (
    "bsrn-pay0616.dat.gz",
    "surfrad-slv16001.dat",
    "tmy_45.000_8.000_2005_2023.epw",
    "tmy_45.000_8.000_2005_2023.csv",
    "tmy_45.000_8.000_2005_2023.json",
    "NLD_Amsterdam062400_IWEC.epw",
    "test_read_psm3.csv",
    "test_read_psm4.csv",
    "test_psm3_2017.csv",
)


def pvlib_samples(cache: pytest.Cache) -> Path:
    """Return a folder with the sample files; download and unpack them on first use."""
    release = version("pvlib")
    target = cache.mkdir("weather-samples") / release
    if all((target / name).is_file() for name in WANTED):
        return target
    target.mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory() as scratch:
        command = [sys.executable, "-m", "pip", "download", "--quiet", "--no-deps", "--no-binary", "pvlib"]
        subprocess.run([*command, f"pvlib=={release}", "--dest", scratch], check=True, timeout=300)
        with tarfile.open(next(Path(scratch).glob("pvlib-*.tar.gz"))) as archive:
            for member in archive.getmembers():
                name = Path(member.name).name
                source = archive.extractfile(member) if name in WANTED and "tests" in member.name else None
                if source is None:
                    continue
                part = target / f"{name}.part"
                with part.open("wb") as file:
                    shutil.copyfileobj(source, file)
                part.replace(target / name)
    missing = [name for name in WANTED if not (target / name).is_file()]
    assert not missing, f"pvlib {release} no longer carries {missing}"
    return target
