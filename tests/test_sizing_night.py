"""The design night against a hand calculation, its own components, and the year's hours."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.optimize import fsolve

from canopy.balance import solve
from canopy.designnight import DesignNight, NightLoad, design_night, night_case
from canopy.designoutside import DesignOutside, percentile_temperature
from canopy.heatcase import HeatCase
from canopy.returns import SPELL_H, ManyYears, Spell, YearLoad, combine
from canopy.sizing import choose, rerun, size, without_opening
from canopy.skybands import sky_bands
from tests.sizingcase import energy_screen, twin_film, winter_case

SIGMA = 5.670374e-8
SPELLS = tuple(Spell(h, -10.0, np.datetime64("2001-01-01", "s")) for h in SPELL_H)


def outside(case: HeatCase, temp: float = -12.0, wind: float = 4.0, sky: float = 190.0) -> DesignOutside:
    """Return a clear design night; humidity 85 %."""
    vapour = np.array([0.85 * 611.0 * np.exp(22.5 * temp / (273.0 + temp))])
    long_wave = np.array([sky])
    return DesignOutside(
        temp, "tests", temp, wind, "tests", 85.0, float(vapour[0]), 98000.0, sky,
        sky_bands(long_wave, np.array([temp]), vapour)[:, 0],
        np.argsort(case.outside.temp_air, kind="stable")[:20],
    )  # fmt: skip


def part(load: NightLoad, words: str) -> float:
    """Return one component."""
    return next(p.w_m2 for p in load.components if words in p.name)


@pytest.fixture(scope="module")
def bare() -> HeatCase:
    """An empty, dry glasshouse."""
    case = winter_case(lai=0.0)
    return replace(case, ground=replace(case.ground, wetness=0.0))


@pytest.fixture(scope="module")
def night(bare: HeatCase) -> DesignNight:
    found = design_night(bare, outside(bare))
    assert found is not None
    return found


def test_by_hand(bare: HeatCase, night: DesignNight) -> None:
    """Glass, floor and pipe temperature from what comes and goes, then each loss with a pocket calculator."""
    house, inside, cold, kelvin = bare.shell, night.inside_c, -12.0, 273.15
    area = house.roof_ratio + house.wall_ratio
    view = house.roof_ratio * house.roof_sky_view + house.wall_ratio * house.wall_sky_view
    wind = 4.0 * house.wind_factor
    leak = 1.0 * house.mean_height_m * 1.237 * 1006.0 / 3600.0  # W/m2K: dry air of 3 °C at 980 hPa
    drive = (0.000145 * (inside - cold) + 0.000174 * wind**2) / (0.000145 * 20.0 + 0.000174 * 16.0)
    leak *= np.sqrt(drive) * (inside - cold)  # ASHRAE basic model: Cs dT + Cw v2, one storey, class 3
    foundation = 0.8 * house.perimeter_per_floor * (inside - cold)
    pipe = np.pi * 0.051 * 2.5  # m2 of pipe per m2 floor

    def black(t: float) -> float:
        return float(SIGMA * (t + kelvin) ** 4)

    def leaving(glass_c: float) -> tuple[float, float, float]:
        convection = area * (2.8 + 1.2 * wind) * (glass_c - cold)  # Bot 1983: multi-span glass below 4 m/s
        sky = view * 0.837 * (black(glass_c) - 190.0)
        return convection, sky, (area - view) * 0.837 * (black(glass_c) - black(cold))

    def unbalanced(t: np.ndarray) -> list[float]:
        glass_c, floor_c, pipe_c = (float(x) for x in t)
        # De Zwart 1996: roof 1.70 dT^(1/3) cos(slope)^(-2/3), floor 1.70 dT^(1/3);
        # pipe 1.32 (dT/D)^.25 (McAdams 1954)
        roof = area * 1.70 * np.cos(np.radians(24.0)) ** (-2 / 3) * np.cbrt(inside - glass_c) ** 4
        floor = 1.70 * np.cbrt(floor_c - inside) ** 4
        warm = pipe * 1.32 * ((pipe_c - inside) / 0.051) ** 0.25 * (pipe_c - inside)
        # half the pipe looks up, half down; floor and glass see each other past the pipes
        to_glass = 0.5 * pipe * 0.88 * (black(pipe_c) - black(glass_c)) * 0.9
        to_floor = 0.5 * pipe * 0.88 * (black(pipe_c) - black(floor_c)) * 0.93
        exchange = (1.0 - 0.5 * pipe) / (1.0 / 0.93 + (1.0 / area) * (1.0 / 0.837 - 1.0))
        across = exchange * (black(floor_c) - black(glass_c))
        return [
            roof + across + to_glass - sum(leaving(glass_c)),
            to_floor - across - floor,
            warm + floor - roof - leak - foundation,
        ]

    pane, _, pipe_c = fsolve(unbalanced, [0.0, 20.0, 70.0])
    convection, sky, ground = leaving(pane)
    total = convection + sky + ground + leak + foundation
    assert night.open.covering_outer_c == pytest.approx(pane, abs=0.5)
    assert night.open.pipe_c == pytest.approx(pipe_c, abs=2.0)
    assert part(night.open, "convection") == pytest.approx(convection, rel=0.04)
    assert part(night.open, "outer face to the sky") == pytest.approx(sky, rel=0.03)
    assert part(night.open, "neighbours") == pytest.approx(ground, rel=0.05)
    assert part(night.open, "leakage") == pytest.approx(leak, rel=0.04)
    assert part(night.open, "perimeter") == pytest.approx(foundation, rel=1e-6)
    assert night.open.total_w_m2 == pytest.approx(total, rel=0.02)
    # and the paper calculation, which knows no temperatures at all
    assert night.hand.total_w_m2 == pytest.approx(night.open.total_w_m2, rel=0.15)


def test_components_add_up_and_screens_help() -> None:
    case = winter_case(screens=(energy_screen(),))
    found = design_night(case, outside(case))
    assert found is not None
    assert found.drawn is not None
    for load in (found.open, found.drawn):
        assert load.gap_w_m2 == pytest.approx(0.0, abs=0.01)
        assert load.total_kw == pytest.approx(load.total_w_m2 * 4.8)
        assert sum(p.kw for p in load.components) == pytest.approx(load.total_kw, abs=0.05)
    # a drawn tight film screen saves 25-35 % (J. Agric. Meteorol. 1979), an infrared-tight one up to 60 %
    assert 0.35 < found.drawn.total_w_m2 / found.open.total_w_m2 < 0.80
    assert found.design is found.drawn
    assert found.hold_open_c is not None
    # an open house needs in proportion to the difference: the design heat holds it down to there
    share = (found.inside_c - found.hold_open_c) / (found.inside_c - -12.0)
    assert share == pytest.approx(found.design_w_m2 / found.open.total_w_m2)


def test_a_night_that_takes_no_heat_is_said() -> None:
    case = winter_case(screens=(energy_screen(),))
    found = design_night(case, outside(case))
    assert found is not None
    idle = replace(found, open=replace(found.open, total_w_m2=0.0), hold_open_c=None)
    idle = replace(idle, drawn=replace(found.open, total_w_m2=0.0, screens="drawn"))
    hours = np.zeros(8760)
    time = np.datetime64("1990-01-01T00", "s") + np.arange(8760) * np.timedelta64(3600, "s")
    sized = size(hours, time, hours, 4800.0, idle, 15.0, False)
    assert sized.basis == "none"
    assert sized.explained[0] == "No simulated hour takes heat."
    assert "screens open takes 0 W/m2." in " ".join(sized.explained)
    assert "higher than" not in " ".join(sized.explained)


def test_a_mild_place_has_no_design_heat() -> None:
    """A set-point below the outside air: both states of the screen need nothing, and it is said."""
    case = winter_case(screens=(energy_screen(),))
    mild = replace(case, climate=replace(case.climate, heat_at=np.full_like(case.climate.heat_at, 2.0)))
    sky = design_night(mild, replace(outside(case), temp_c=8.0))  # heat for a cold sky over mild air
    assert sky is not None
    assert sky.open.total_w_m2 > 0.0
    assert sky.hold_open_c is None
    found = design_night(mild, replace(outside(case), temp_c=25.0))
    assert found is not None
    assert found.open.total_w_m2 == 0.0
    assert found.hold_open_c is None
    hours = np.zeros(8760)
    time = np.datetime64("1990-01-01T00", "s") + np.arange(8760) * np.timedelta64(3600, "s")
    assert size(hours, time, hours + 8.0, 4800.0, found, 15.0, False).design_w_m2 == 0.0


def test_design_night_is_steady_and_dry() -> None:
    case = winter_case(covering=twin_film())
    row = 0
    cold = outside(case)
    result = solve(night_case(case, cold, row, 18.0, np.zeros(0)))
    for name in ("air_store", "vapour_store", "crop_store", "pipe_store", "covering_store"):
        assert np.abs(getattr(result, name)).max() < 1e-3, name
    assert np.ptp(result.heat_delivered) < 1e-3
    assert np.abs(result.soil_store + result.deep_loss).max() < 0.01
    assert result.temp_air == pytest.approx(18.0, abs=1e-6)


def test_colder_windier_clearer_needs_more() -> None:
    case = winter_case()
    usual = design_night(case, outside(case))
    assert usual is not None
    for other in (outside(case, temp=-15.0), outside(case, wind=8.0), outside(case, sky=170.0)):
        more = design_night(case, other)
        assert more is not None
        assert more.design_w_m2 > usual.design_w_m2 + 1.0


def test_recovery_by_hand() -> None:
    case = winter_case()
    found = design_night(case, outside(case))
    assert found is not None
    air = 1.2 * 1006.0 * 5.39  # J m-2 K-1
    crop = 2.0 * 1.2 * 4186.0
    bore = 0.051 - 2 * 0.00225  # 51 mm steel tube, 2.25 mm wall
    steel = np.pi / 4 * (0.051**2 - bore**2) * 7850.0 * 480.0
    pipes = 2.5 * (np.pi / 4 * bore**2 * 1000.0 * 4186.0 + steel)
    glass_share = (found.open.covering_outer_c + 12.0) / (found.inside_c + 12.0)
    cover = 8400.0 * 1.375 * glass_share
    assert found.recovery.stores_wh_m2_k == pytest.approx((air + crop + pipes + cover) / 3600.0, rel=1e-3)
    assert found.recovery.ramp_k_per_h == pytest.approx(1.0)  # the case's ramp
    assert found.recovery.extra_w_m2 == pytest.approx(found.recovery.stores_wh_m2_k)


def test_house_without_heating_has_no_design_night() -> None:
    case = winter_case()
    idle = replace(case, climate=replace(case.climate, heat_at=np.full(480, -np.inf)))
    assert design_night(idle, outside(idle)) is None
    assert (
        design_night(replace(case, heating=replace(case.heating, capacity_w_m2=0.0)), outside(case)) is None
    )


def test_proposed_heating_runs_again() -> None:
    case = winter_case()
    result = solve(case)
    time = np.datetime64("2001-01-01T00:00:00", "s") + np.arange(480) * np.timedelta64(3600, "s")
    peak = float(result.heat_delivered.max())
    ample = rerun(case, result, time, peak + 1.0)
    assert not ample.solved_again
    assert ample.deficit_h == 0.0
    short = rerun(case, result, time, 0.8 * peak)
    again = solve(replace(case, heating=replace(case.heating, capacity_w_m2=0.8 * peak)))
    assert short.solved_again
    below = again.temp_air < case.climate.heat_at - 0.1
    assert short.deficit_h == np.count_nonzero(below) > 0
    assert short.deficit_kh == pytest.approx((case.climate.heat_at - again.temp_air)[below].sum(), rel=1e-4)
    assert short.lowest_air_c == pytest.approx(again.temp_air.min(), abs=1e-4)
    assert short.lowest_air_c < ample.lowest_air_c
    assert short.limited_h >= short.deficit_h * 0.5


def test_sizing_of_the_hours() -> None:
    case = winter_case()
    result = solve(case)
    time = np.datetime64("2001-01-01T00:00:00", "s") + np.arange(480) * np.timedelta64(3600, "s")
    found_night = design_night(case, outside(case))
    assert found_night is not None
    sizing = size(result.heat_delivered, time, case.outside.temp_air, 4800.0, found_night, 15.0, typical=True)
    heat = result.heat_delivered
    assert sizing.peak_w_m2 == heat.max()
    assert sizing.peak_at == time[heat.argmax()]
    # 35 of 8760 h are 1.92 of these 480 h
    falling = np.sort(heat)[::-1]
    expected = np.interp(35 / 8760 * 480, [1, 2], falling[1:3])
    assert sizing.load_exceeded_35_h_w_m2 == pytest.approx(expected)
    assert sizing.annual_heat_kwh_m2 == pytest.approx(heat.sum() / 1000.0)
    design = max(found_night.design_w_m2, sizing.load_exceeded_35_h_w_m2)
    assert sizing.design_heat_kw == pytest.approx(design * 4.8)
    assert sizing.boiler_kw == pytest.approx(1.15 * design * 4.8)
    assert sizing.full_load_hours == pytest.approx(heat.sum() / design)
    said = " ".join(sizing.explained)
    assert "no measured year" in said
    assert "percentiles are scaled" in said


def test_percentile_temperature() -> None:
    rng = np.random.default_rng(4)
    temp = rng.normal(8.0, 9.0, 8760)
    cold = percentile_temperature(temp, 35.0)
    assert np.count_nonzero(temp < cold) == 35  # ASHRAE: 99.6 % of 8760 hours are warmer


def test_short_pipes_are_said() -> None:
    case = winter_case()
    thin = replace(case, heating=replace(case.heating, pipe_m_per_m2=1.0, flow_max_c=60.0))
    enough, short = design_night(case, outside(case)), design_night(thin, outside(thin))
    assert enough is not None
    assert short is not None
    assert enough.pipes_note == ""
    assert "1 m/m2 of pipe at 60 °C give" in short.pipes_note
    # the load is what the house needs, not what the pipes can do; radiation of more pipes moves it a little
    assert short.design_w_m2 == pytest.approx(enough.design_w_m2, rel=0.05)


def years(peaks: list[float]) -> list[YearLoad]:
    """Return years with these peaks, W/m2."""
    return [YearLoad(2001 + k, peak, 300.0, -10.0, ()) for k, peak in enumerate(peaks)]


def test_size_is_the_larger_of_night_and_years() -> None:
    assert choose(150.0, 140.0, None) == (150.0, "design night")
    assert choose(120.0, 140.0, None) == (140.0, "simulated hours (99.6 %)")
    assert choose(0.0, 0.0, None) == (0.0, "none")
    few = combine_peaks([150.0, 180.0, 160.0])
    assert choose(170.0, 140.0, few) == (180.0, "coldest of several years")
    assert choose(190.0, 140.0, few) == (190.0, "design night")
    peaks = [150.0, 155.0, 160.0, 148.0, 170.0, 152.0, 158.0, 149.0, 163.0, 151.0, 157.0, 166.0]
    many = combine_peaks(peaks)
    level, basis = choose(150.0, 140.0, many)
    assert basis == "return level"
    # Gumbel by L-moments, once in 20 years: location + 2.9702 scale
    x = np.sort(peaks)
    b1 = float(np.sum(x * np.arange(12) / 11) / 12)
    scale = (2 * b1 - x.mean()) / np.log(2)
    assert level == pytest.approx(x.mean() - 0.57722 * scale + 2.9702 * scale, rel=1e-5)


def combine_peaks(peaks: list[float]) -> ManyYears:
    """Return the spread over years with these peaks."""
    found = combine([replace(one, spells=SPELLS) for one in years(peaks)])
    assert found is not None
    return found


def test_opening_pulse_buys_no_boiler() -> None:
    load = np.full(480, 100.0)
    load[::24] = 300.0  # a screen opens every morning
    opening = np.zeros(480, dtype=bool)
    opening[::24] = True
    time = np.datetime64("2001-01-01T00:00:00", "s") + np.arange(480) * np.timedelta64(3600, "s")
    plain = size(load, time, np.zeros(480), 1000.0, None, 0.0, typical=True)
    calm = size(load, time, np.zeros(480), 1000.0, None, 0.0, typical=True, opening=opening)
    assert plain.design_w_m2 == 300.0
    assert calm.design_w_m2 == 100.0
    assert calm.load_exceeded_35_h_w_m2 == plain.load_exceeded_35_h_w_m2 == 300.0
    assert any("of the 2 highest hours a screen opens" in words for words in calm.explained)
    assert list(without_opening(load, opening)) == [100.0] * 480


def test_unheated_house_has_no_size() -> None:
    time = np.datetime64("2001-01-01T00:00:00", "s") + np.arange(480) * np.timedelta64(3600, "s")
    found = size(np.full(480, 1e-12), time, np.zeros(480), 1000.0, None, 15.0, typical=False)
    assert (found.design_w_m2, found.boiler_kw, found.full_load_hours, found.basis) == (0.0, 0.0, 0.0, "none")
    assert found.peak_w_m2 == 0.0
