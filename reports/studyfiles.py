"""Study files on disk: the starter study, and whether the files that a study names are there."""

from __future__ import annotations

import os
from importlib import resources
from pathlib import Path

from canopy.studyfile import Plan, Study, is_file_name
from canopy.studymessage import one_line
from weather.errors import UserError, nearest


def study_text(name: str) -> str:
    """Return the text of a study that ships with the package: "starter" or "demo"."""
    return resources.files("reports").joinpath("studies", f"{name}.toml").read_text("utf-8")


def write_starter(path: Path) -> None:
    """Write the starter study; an existing file stays as it is.

    Errors: UserError when the file exists or cannot be written.
    """
    try:
        handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o644)
    except FileExistsError:
        raise UserError(f"{path}: exists already and stays as it is; choose another name") from None
    except OSError as error:
        raise UserError(f"{path}: cannot be written: {error.strerror}") from None
    with os.fdopen(handle, "w", encoding="utf-8") as file:
        file.write(study_text("starter"))


def check_files(study: Study) -> None:
    """Refuse a study that names files that are not there, or spectra that cannot be used (UserError)."""
    from weather.typical import shipped_names

    keys = study.keys.weather
    if keys.shipped is not None and keys.shipped not in shipped_names():
        hint = nearest(keys.shipped, shipped_names()) or f"; known: {', '.join(shipped_names())}"
        raise UserError(f'{study.label}: weather -> shipped: unknown year "{keys.shipped}"{hint}')
    names = [("weather -> file", keys.file)] + [("weather -> files", f) for f in keys.files]
    names += [(f'covering "{c.name}" -> spectrum', c.spectrum) for c in study.keys.covering]
    for plan in study.plans:
        names += _csv_names(plan, study)
    for crumb, name in names:
        if name is not None and not _is_there(study.folder / name):
            shown = one_line(str(study.folder / name), 200)
            raise UserError(f"{study.label}: {crumb}: no such file: {shown}")
    for crumb, name in names:
        if name is not None and not crumb.startswith("weather"):
            _check_spectrum(study.folder / name, f"{study.label}: {crumb}", crumb.endswith("leaf"))


def _check_spectrum(path: Path, where: str, leaf: bool) -> None:
    """Read a CSV of a covering or leaf, so that no candidate is computed before a bad one is found."""
    from canopy.labcsv import read_lab_csv
    from canopy.leaves import read_spectrum

    try:
        if leaf:
            read_spectrum(path)
        else:
            read_lab_csv(path)
    except UserError as error:
        raise UserError(f"{where}: {error}") from None


def _csv_names(plan: Plan, study: Study) -> list[tuple[str, str | None]]:
    """Return where a candidate names a CSV, and its name."""
    own = {keys.name for keys in study.keys.covering}
    places = (
        ("covering", plan.covering),
        ("house -> wall_covering", plan.house.wall_covering),
        ("house -> gable_covering", plan.house.gable_covering),
        ("crop -> leaf", plan.crop.leaf),
    )
    return [
        (f'candidate "{plan.name}" -> {key}', name)
        for key, name in places
        if name is not None and name not in own and is_file_name(name)
    ]


def _is_there(path: Path) -> bool:
    try:
        return path.exists()
    except (OSError, ValueError):  # a name too long for the system
        return False
