"""One grey band against three: who is compared, which way it errs, what the report says."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from canopy.balance import solve
from canopy.greyband import GreyBand, grey_band, selectivity
from canopy.heatcase import HeatCase
from canopy.optics import ThermalOptics
from reports.display import Display
from reports.page import sections_of
from reports.sections_grey import grey
from reports.summary import summaries
from tests.reportcase import fakes, make_run


def film_case(passes: tuple[float, float, float]) -> HeatCase:
    """Return the made-up house under a film with these long-wave transmittances."""
    case = make_run(fakes(1)).candidates[0].case
    faces = np.full((1, 3), 0.05)
    film = ThermalOptics(np.array([passes]), faces, faces)
    air = replace(case.climate, heat_at=np.full(8760, 16.0))
    return replace(case, covering=replace(case.covering, dry=film, wet=film), climate=air)


def test_a_covering_that_is_alike_in_all_bands_is_not_compared() -> None:
    case = film_case((0.6, 0.6, 0.6))
    assert selectivity(case) == 0.0
    result = make_run(fakes(1)).candidates[0].heat
    assert grey_band(case, result, np.arange(8760)) is None


def test_a_film_that_stops_the_window_of_the_sky_is_wronged_by_one_band() -> None:
    # Absorption in 8-14 µm, where a clear sky is coldest, saves more than a mean value tells: the point
    # of infrared-absorbing films (Nijskens et al. 1985, Acta Hortic. 170)
    case = film_case((0.8, 0.1, 0.8))
    heat = solve(case)
    found = grey_band(case, heat, np.arange(8760))
    assert found is not None
    assert found.spread == pytest.approx(0.7)
    assert found.heat_kwh == pytest.approx(heat.heat_delivered.sum() / 1000)
    assert found.grey_heat_kwh > found.heat_kwh * 1.02
    assert found.grey_peak_w > found.peak_w


def test_the_report_says_how_far_one_grey_band_is_off() -> None:
    run = make_run(fakes(2))
    book = GreyBand(0.7, 400.0, 448.0, 180.0, 200.0, 300.0, 350.0)
    first = replace(run.candidates[0], grey=book)
    both = replace(run, candidates=(first, run.candidates[1]))
    section = grey(both, summaries(both), Display("si"))
    assert section is not None
    lead = " ".join(section.blocks[0].lines)  # type: ignore[union-attr]
    assert "448\u00a0kWh/m² of heat a year instead of 400\u00a0kWh/m²: +12.0\u202f%" in lead
    assert "grey" in [s.slug for s in sections_of(both)]
    assert "grey" not in [s.slug for s in sections_of(run)]
