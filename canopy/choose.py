"""From the names in a candidate to records: covering, screens with their rules, leaf."""

from __future__ import annotations

from dataclasses import dataclass

from canopy import library
from canopy.optics import Covering, Leaf
from canopy.studyfile import Plan, Study, is_file_name
from canopy.studykeys import CoveringKeys
from weather.errors import UserError


@dataclass(frozen=True)
class Chosen:
    """A covering as chosen, the study's own keys for it (dirt, wash dates), and what was assumed."""

    covering: Covering
    keys: CoveringKeys | None
    notes: tuple[str, ...] = ()


def choose_covering(name: str, study: Study) -> Chosen:
    """Return the covering of a name: a library row, a [[covering]] of the study, or a laboratory CSV.

    Errors: UserError for figures or a spectrum that cannot be used.
    """
    own = next((c for c in study.keys.covering if c.name == name), None)
    if own is not None:
        return _own_covering(own, study)
    if is_file_name(name):
        try:
            return _from_laboratory(study, name, name)
        except UserError as error:
            raise UserError(f"{study.label}: {error}") from None
    return Chosen(library.covering(name), None)


def _from_laboratory(study: Study, file: str, name: str, keys: CoveringKeys | None = None) -> Chosen:
    from canopy.labspectrum import covering_from_spectrum

    thickness = keys.thickness_mm if keys is not None else None
    wet = keys.wet if keys is not None else None
    lab = covering_from_spectrum(study.folder / file, name, thickness, wet=wet)
    dirt = _dirt(keys) if keys is not None else ""
    said = (*lab.assumed, *lab.limits, dirt)
    return Chosen(lab.covering, keys, tuple(f"{name}: {note}" for note in said if note))


def _own_covering(keys: CoveringKeys, study: Study) -> Chosen:
    try:
        if keys.spectrum is not None:
            return _from_laboratory(study, keys.spectrum, keys.name, keys)
        from canopy.quoted import Quote, fit_quoted

        quote = Quote(
            name=keys.name,
            based_on=str(keys.based_on),
            par_normal=keys.par_normal,
            par_hemispherical=keys.par_hemispherical,
            haze=keys.haze,
            thermal_transmittance=keys.thermal_transmittance,
            u_value=keys.u_value,
        )
        fitted = fit_quoted(quote, wet=keys.wet, age_years=keys.age_years)
    except UserError as error:
        raise UserError(f'{study.label}: covering "{keys.name}": {error}') from None
    aged = f"{keys.age_years:g} years old" if keys.age_years else ""
    said = (*fitted.assumed, *fitted.contradictions, fitted.sensitivity, aged, _dirt(keys))
    if not quote.says_anything:  # one short note
        said = ("; ".join(filter(None, said)),)
    return Chosen(fitted.covering, keys, tuple(f"{keys.name}: {note}" for note in said if note))


def _dirt(keys: CoveringKeys) -> str:
    """Return what dirt takes, in words; empty without any."""
    if not keys.dirt_by_month:
        return ""
    low, high = 100.0 * min(keys.dirt_by_month), 100.0 * max(keys.dirt_by_month)
    share = f"{high:g}" if low == high else f"{low:g} to {high:g}"
    washed = f", washed on {', '.join(keys.wash_days)}" if keys.wash_days else ""
    return f"dirt takes {share} % of the light by month{washed}"


def choose_leaf(plan: Plan, study: Study) -> tuple[Leaf, tuple[str, ...]]:
    """Return the leaf type of a candidate, by name or from a CSV beside the study, and what was assumed."""
    if is_file_name(plan.crop.leaf):
        from canopy.leaves import leaf_from_csv

        try:
            return leaf_from_csv(study.folder / plan.crop.leaf)
        except UserError as error:
            raise UserError(f"{study.label}: {error}") from None
    return library.leaf(plan.crop.leaf), ()
