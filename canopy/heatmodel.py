"""Everything of a heat case that does not change while it is solved, laid out for the solver."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from canopy import exchange as ex
from canopy import vapour as vp
from canopy.bands import THERMAL, BandSet
from canopy.emitters import Pipes, pipe_plane, pipes
from canopy.heatcase import HeatCase, SolarGain
from canopy.heatindex import Index, Order, march_order, order_index
from canopy.longwave import ExchangeAreas, Plane, band_emission, exchange_areas, opaque, widening
from canopy.optics import ThermalOptics
from canopy.soil import SoilModes, deep_temperature, soil_modes
from weather.constants import CP_AIR, CP_WATER, GAS_CONSTANT, MOLAR_MASS_AIR, WATER_AIR_RATIO, ZERO_C_K

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

CALM_M_S: Final = 0.5  # air is never quite still: what a cup anemometer reports as 0 (WMO-No. 8, ch. 5)
LEAST_LAI: Final = 0.01  # keeps the leaf's equation regular in an empty house
STAND_ALONE_FACE: Final = 0.05  # share of a stowed screen's face that the air still reaches (the bundle)
OPEN_ALL_MARGIN_K: Final = 0.5  # vents stand open when outside is this close below the set-point
OPEN_SCREENED_K: Final = 4.0  # the same under a drawn screen, whose upper side may be the colder
VENT_HELPS_BELOW: Final = 0.95  # vents dry the house only if outside holds less than this share of the limit


@dataclass(frozen=True)
class Exchange:
    """Exchange areas hour by hour: base (dry, no gap) and the changes by wetness and by the screen gap."""

    pairs: list[tuple[int, int]]  # positions in `Index.surfaces`
    base: list[Floats]  # per pair (T, N or 1)
    wet: list[Floats | None]
    gap: list[Floats | None]
    out_base: list[Floats | None]  # per surface, share absorbed of what falls on the covering; None: opaque
    out_wet: list[Floats | None]
    out_gap: list[Floats | None]


@dataclass(frozen=True)
class Model:
    """A heat case ready to solve; arrays are in march order (N,) or (k, N)."""

    case: HeatCase
    bands: BandSet
    order: Order
    index: Index
    hours: int
    step_s: float
    cover_size: float
    wall_share: float  # of the covering: not behind ceiling screens
    sky_size: float
    ground_size: float
    exchange: Exchange
    incident: Floats  # (T, N) W/m2 floor that falls on the covering
    sky: Floats  # (T, N)
    outside_emission: Floats  # (T, N)
    temp_out: Floats
    vapour_out: Floats
    ratio_out: Floats
    pressure: Floats
    wind: Floats
    mean_k: Floats
    density: Floats
    outer_h: Floats
    inner_free: float
    gaps: tuple[ex.GasLayer, ...]
    lewis: Floats
    leaf_unit: Floats
    leaf_vapour_unit: Floats
    stomata_light: Floats
    day: Floats
    has_leaf: Floats
    capacity: dict[int, Floats]  # store -> J m-2 K-1 / step (air: of dry air; vapour: W/m2 per kg/kg)
    air_kg: float  # dry air per m2 floor
    pipes: Pipes
    soil: SoilModes
    deep: Floats
    soil_start: Floats  # 1 in the hour that starts a record without memory, else 0
    gain: dict[int, tuple[Floats, Floats]]  # row -> dry gain, wet less dry
    drawn: Floats  # (S, N)
    gap_max: Floats
    heat_at: Floats
    vent_at: Floats
    humidity_max: Floats  # share 0 ... 1
    dry_outside: Bools
    let_go: Bools  # hours taken without their humidity limit (see `balance`)
    open_all: Bools
    hold: Floats  # opening that an hour is held at, nan: free (see `heatretry.bracketed`)
    vent_max: Floats
    min_pipe: Floats

    def take(self, at: NDArray[np.int64]) -> Model:
        """The same house in some hours only, by their place in march order."""

        def cut(value: object) -> object:
            if isinstance(value, np.ndarray):
                return value[..., at] if value.shape[-1] == self.hours else value
            if isinstance(value, dict):
                return {key: cut(item) for key, item in value.items()}
            if isinstance(value, list | tuple):
                return type(value)(cut(item) for item in value)
            return value

        plain = ("case", "bands", "order", "index", "pipes", "soil", "exchange", "gaps", "hours")
        parts = {f.name: getattr(self, f.name) for f in fields(self)}
        parts |= {name: cut(value) for name, value in parts.items() if name not in plain}
        rays = {f.name: cut(getattr(self.exchange, f.name)) for f in fields(Exchange) if f.name != "pairs"}
        return Model(**{**parts, "hours": len(at), "exchange": replace(self.exchange, **rays)})  # type: ignore[arg-type]


def _planes(model_case: HeatCase, optics: ThermalOptics, gap: Floats, drawn: Floats, p: Pipes) -> list[Plane]:
    """The stack of one covering state for K cases: `gap` (K,), `drawn` (S, K)."""
    shell = model_case.shell
    size = shell.roof_ratio + shell.wall_ratio
    leaf = model_case.crop.emissivity[:, None]
    back = (1.0 - gap) * (1.0 - leaf)
    through = gap + 0.0 * leaf
    floor = opaque(model_case.ground.emissivity[:, None])
    planes = [floor, pipe_plane(p), Plane(through, through, back, back)]
    for number in range(len(model_case.screens) - 1, -1, -1):
        t = model_case.screens[number].thermal
        d = drawn[number]
        passing = 1.0 - d + d * t.transmit[0][:, None]
        low, high = d * t.reflect_inside[0][:, None], d * t.reflect_outside[0][:, None]
        planes.append(Plane(passing, passing, low, high))
    planes.append(widening(size))
    for layer in range(optics.transmit.shape[0] - 1, -1, -1):
        t = optics.transmit[layer][:, None]
        planes.append(
            Plane(t, t, optics.reflect_inside[layer][:, None], optics.reflect_outside[layer][:, None], size)
        )
    return planes


def _wall_share(case: HeatCase) -> float:
    """Share of the covering (side walls, gable ends) that stays free when screens are drawn."""
    if case.shell.walls_screened:
        return 0.0
    return case.shell.wall_ratio / (case.shell.roof_ratio + case.shell.wall_ratio)


def _solver_order(areas: ExchangeAreas, layers: int, screens: int) -> tuple[Floats, Floats]:
    """Reorder surfaces from floor-first to `Index.surfaces` (cover outermost first ... leaf, floor, pipe)."""
    total = 3 + screens + layers
    order = [*range(total - 1, 2, -1), 2, 0, 1]
    return areas.pair[np.ix_(order, order)], areas.outside[order]


def _exchange(case: HeatCase, p: Pipes, gap: Floats, drawn: Floats, gap_max: Floats) -> Exchange:
    """Exchange areas for every hour; equal hours are solved once."""
    layers, screens = case.covering.dry.transmit.shape[0], len(case.screens)
    keys = np.vstack([gap, drawn, gap_max])
    if np.ptp(keys, axis=1).max() < 1e-12:
        cases, which = keys[:, :1], np.zeros(len(gap), dtype=int)
    else:
        mixed = np.zeros(keys.shape[1], dtype=np.int64)
        for row in keys:
            _, rank = np.unique(row, return_inverse=True)
            mixed = mixed * (int(rank.max()) + 1) + rank
            _, mixed = np.unique(mixed, return_inverse=True)
        _, first, which = np.unique(mixed, return_index=True, return_inverse=True)
        cases = keys[:, first]
    k_gap, k_drawn, k_max = cases[0], cases[1:-1], cases[-1]

    def areas(optics: ThermalOptics, opened: Floats) -> tuple[Floats, Floats]:
        pair, outside = _solver_order(
            exchange_areas(_planes(case, optics, k_gap, k_drawn * (1.0 - opened), p)), layers, screens
        )
        if not screens:
            return pair, outside
        bare = exchange_areas(_planes(case, optics, k_gap, 0.0 * k_drawn, p))  # walls: no screen before them
        walls = _wall_share(case)
        free, free_outside = _solver_order(bare, layers, screens)
        return (1.0 - walls) * pair + walls * free, (1.0 - walls) * outside + walls * free_outside

    pair, outside = areas(case.covering.dry, 0.0 * k_max)
    wet = [x - y for x, y in zip(areas(case.covering.wet, 0.0 * k_max), (pair, outside), strict=True)]
    opened = bool((k_max > 0.0).any())
    scale = np.where(k_max > 0.0, 1.0 / np.where(k_max > 0.0, k_max, 1.0), 0.0)
    by_gap = (
        [(x - y) * scale for x, y in zip(areas(case.covering.dry, k_max), (pair, outside), strict=True)]
        if opened
        else [0.0 * pair, 0.0 * outside]
    )

    def hourly(values: Floats) -> Floats:
        return np.ascontiguousarray(values[:, which]) if cases.shape[1] > 1 else values

    def change(values: Floats) -> Floats | None:
        return hourly(values) if np.abs(values).max() > 1e-9 else None

    count = pair.shape[0]
    parts = (outside, wet[1], by_gap[1])
    seen = [max(float(np.abs(part[i]).max()) for part in parts) > 1e-12 for i in range(count)]
    pairs = [(i, j) for i in range(count) for j in range(i) if np.abs(pair[i, j]).max() > 1e-12]
    return Exchange(
        pairs=pairs,
        base=[hourly(pair[i, j]) for i, j in pairs],
        wet=[change(wet[0][i, j]) for i, j in pairs],
        gap=[change(by_gap[0][i, j]) for i, j in pairs],
        out_base=[hourly(outside[i]) if seen[i] else None for i in range(count)],
        out_wet=[change(wet[1][i]) for i in range(count)],
        out_gap=[change(by_gap[1][i]) for i in range(count)],
    )


def _gains(case: HeatCase, index: Index, order: Order) -> dict[int, tuple[Floats, Floats]]:
    """Absorbed sun by row: dry, and wet less dry."""

    def both(name: str, number: int | None = None) -> tuple[Floats, Floats]:
        dry, wet = (getattr(g, name) for g in (case.gain_dry, case.gain_wet))
        if number is not None:
            dry, wet = dry[number], wet[number]
        return order.into(dry), order.into(wet - dry)

    rows = {index.cover(k): both("covering", k) for k in range(index.layers)}
    rows |= {index.screen(k): both("screen", k) for k in range(index.screens)}
    return rows | {index.leaf: both("crop"), index.floor: both("ground"), index.house_air: both("air")}


def _light_factor(case: HeatCase, gain: SolarGain) -> Floats:
    """Stomatal light response of the whole stand: sunlit and shaded leaves side by side."""
    lai = np.maximum(case.crop.lai, LEAST_LAI)
    sunlit = np.minimum(case.crop.sunlit_lai, lai)
    shaded = lai - sunlit
    on_sunlit = gain.crop_sunlit / np.maximum(2.0 * sunlit, 1e-9)
    on_shaded = np.maximum(gain.crop - gain.crop_sunlit, 0.0) / np.maximum(2.0 * shaded, 1e-9)
    open_to = sunlit / vp.light_factor(on_sunlit) + shaded / vp.light_factor(on_shaded)
    return np.asarray(lai / open_to)


def _capacities(case: HeatCase, index: Index, size: float, memory: Floats, lai: Floats) -> dict[int, Floats]:
    """Heat that each store takes per kelvin and step, W m-2 K-1 (vapour: W/m2 per kg/kg)."""
    step = case.outside.step_s
    air = air_mass(case)
    store = {index.cover(k): case.covering.heat_capacity[k] * size for k in range(index.layers)}
    store |= {index.screen(k): s.heat_capacity for k, s in enumerate(case.screens)}
    store |= {index.house_air: air * CP_AIR, index.air0_vapour: air * vp.LATENT_HEAT}
    store |= {index.pipe: pipes(case.heating).capacity}
    out = {row: value / step * memory for row, value in store.items()}
    out[index.leaf] = np.maximum(lai, LEAST_LAI) * case.crop.water_kg_per_lai * CP_WATER / step * memory
    return out


def air_mass(case: HeatCase) -> float:
    """Dry air in the house, kg per m2 floor, at 15 degC and the record's mean pressure."""
    density = float(np.mean(case.outside.pressure)) * MOLAR_MASS_AIR / (GAS_CONSTANT * (ZERO_C_K + 15.0))
    return density * case.shell.mean_height_m


def build_model(case: HeatCase, bands: BandSet = THERMAL) -> Model:
    """Lay a heat case out for the solver (arrays in march order, exchange areas, modes, limits)."""
    out, shell, climate = case.outside, case.shell, case.climate
    order = march_order(len(out.temp_air))
    hours = order.steps * order.chunks
    index = Index(len(case.covering.heat_capacity), len(case.screens))
    size = shell.roof_ratio + shell.wall_ratio
    sky_size = shell.roof_ratio * shell.roof_sky_view + shell.wall_ratio * shell.wall_sky_view
    start = np.zeros(hours)
    start[0] = 0.0 if case.periodic else 1.0
    temp_out, e_out, pressure = (order.into(x) for x in (out.temp_air, out.vapour_pressure, out.pressure))
    lai = np.maximum(order.into(case.crop.lai), LEAST_LAI)
    drawn = order.into(climate.screen_drawn) if case.screens else np.zeros((0, hours))
    gap_max = _gap_limit(case, order, hours)
    tubes = pipes(case.heating)
    soil = soil_modes(case.ground, out.step_s)
    emission, _ = band_emission(temp_out, bands)
    sky = order.into(out.sky_bands)
    mean_k = ZERO_C_K + 0.5 * (temp_out + 18.0)
    density = pressure * MOLAR_MASS_AIR / (GAS_CONSTANT * mean_k)
    wind = np.maximum(order.into(out.wind_speed), CALM_M_S) * shell.wind_factor
    heat_at, limit = order.into(climate.heat_at), order.into(climate.humidity_max_pct) / 100.0
    vent_at = order.into(climate.vent_at)
    warm_side = np.maximum(np.where(np.isfinite(heat_at), heat_at, temp_out), temp_out)
    has_leaf = (order.into(case.crop.lai) > 0.0).astype(float)
    return Model(
        case=case, bands=bands, order=order, index=index, hours=hours, step_s=out.step_s,
        cover_size=size, wall_share=_wall_share(case), sky_size=sky_size, ground_size=size - sky_size,
        exchange=_exchange(case, tubes, order.into(case.crop.gap), drawn, gap_max),
        incident=sky_size * sky + (size - sky_size) * emission, sky=sky, outside_emission=emission,
        temp_out=temp_out, vapour_out=e_out, ratio_out=vp.mixing_ratio(e_out, pressure)[0],
        pressure=pressure, wind=wind, mean_k=mean_k, density=density,
        outer_h=ex.outside_convection(shell.form, wind),
        inner_free=ex.inside_cover(shell.form, shell.roof_slope_deg),
        gaps=tuple(ex.gas_layer(g, shell.roof_slope_deg) for g in case.covering.gaps),
        lewis=vp.lewis_latent(pressure),
        leaf_unit=2.0 * lai * density * CP_AIR,
        leaf_vapour_unit=2.0 * lai * has_leaf * density * WATER_AIR_RATIO * vp.LATENT_HEAT / pressure,
        stomata_light=order.into(_light_factor(case, case.gain_dry)),
        day=order.into(out.sun_up.astype(float)), has_leaf=has_leaf,
        capacity=_capacities(case, index, size, 1.0 - start, order.into(case.crop.lai)),
        air_kg=air_mass(case), pipes=tubes, soil=soil,
        deep=order.into(deep_temperature(out.temp_air, out.step_s, soil)),
        soil_start=start, gain=_gains(case, index, order), drawn=drawn, gap_max=gap_max,
        heat_at=heat_at, vent_at=vent_at, humidity_max=limit,
        dry_outside=e_out < VENT_HELPS_BELOW * limit * vp.saturation(warm_side)[0],
        let_go=np.zeros(hours, dtype=bool), open_all=_stand_open(temp_out, heat_at, vent_at, drawn),
        hold=np.full(hours, np.nan), vent_max=np.full(hours, 1.0 if shell.vent_area_ratio > 0.0 else 0.0),
        min_pipe=np.where(np.isfinite(heat_at), order.into(climate.min_pipe_c), -np.inf),
    )  # fmt: skip


def _stand_open(temp_out: Floats, heat_at: Floats, vent_at: Floats, drawn: Floats) -> Bools:
    """Hours in which vents stand fully open whatever the inside: outside warm, no heat to lose."""
    screened = drawn.max(axis=0, initial=0.0) > 0.0
    margin = np.where(screened, OPEN_SCREENED_K, OPEN_ALL_MARGIN_K)
    return np.asarray((temp_out >= vent_at - margin) & (temp_out >= heat_at + OPEN_ALL_MARGIN_K))


def _gap_limit(case: HeatCase, order: Order, hours: int) -> Floats:
    """Widest gap that the drawn screens may open for humidity or heat, share of their area."""
    if not case.screens or case.climate.screen_gap_max is None:
        return np.zeros(hours)
    return np.asarray(
        order.into(case.climate.screen_gap_max)
        * (case.climate.screen_drawn.max(axis=0) > 0.0)[order_index(order)]
    )
