"""A slow reference for the heat balance: one hour after the other, scipy root, regimes tried in turn.

Written from the equations, not from the solver: long-wave by solving the up and down fluxes of every band as
one linear system at the temperatures in hand, the soil by a matrix exponential, set-points by trying each
regime until one holds. One covering layer, no screens. Only physical constants are shared.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from scipy.integrate import quad
from scipy.linalg import expm
from scipy.optimize import root

from canopy.heatcase import HeatCase
from weather.psychro import saturation_pressure

SIGMA, ZERO = 5.670374419e-8, 273.15
CP, CPV, CPW = 1006.0, 1860.0, 4186.0
LAMBDA = 2.501e6 - (CPW - CPV) * 20.0
RATIO = 18.015268e-3 / 28.966e-3
R_AIR = 8.31446261815324 / 28.966e-3
LEWIS = 0.857 ** (-2.0 / 3.0)
G = 9.80665


def planck_share(low: float, high: float, kelvin: float) -> float:
    """Blackbody share between two wavelengths by quadrature of x^3 / (e^x - 1)."""
    upper = 14387.7688 / (low * kelvin) if low > 0 else math.inf
    lower = 14387.7688 / (high * kelvin) if math.isfinite(high) else 0.0
    value, _ = quad(lambda x: x**3 / math.expm1(x) if x > 0 else 0.0, lower, min(upper, 60.0), epsabs=1e-12)
    return value * 15.0 / math.pi**4


class Shares:
    """Emission per band by a dense table of the quadrature."""

    def __init__(self) -> None:
        self.at = np.arange(-60.0, 111.0, 1.0)
        edges = (0.0, 8.0, 14.0, math.inf)
        rows = [[planck_share(edges[k], edges[k + 1], t + ZERO) for t in self.at] for k in range(2)]
        self.rows = np.array([*rows, 1.0 - np.sum(rows, axis=0)])
        from scipy.interpolate import CubicSpline

        self.spline = CubicSpline(self.at, self.rows, axis=1)

    def __call__(self, celsius: float) -> np.ndarray:
        """(3,) W/m2."""
        return np.asarray(self.spline(celsius)) * SIGMA * (celsius + ZERO) ** 4


@dataclass
class Before:
    """What an hour takes from the one before (None: no past)."""

    cover: float
    leaf: float
    air: float
    pipe: float
    ratio: float
    film: float
    soil: np.ndarray


class Reference:
    """Marches one case."""

    def __init__(self, case: HeatCase) -> None:
        self.c = case
        self.emit = Shares()
        sh, h = case.shell, case.heating
        self.size = sh.roof_ratio + sh.wall_ratio
        self.sky_size = sh.roof_ratio * sh.roof_sky_view + sh.wall_ratio * sh.wall_sky_view
        d = h.pipe_diameter_m
        self.pipe_area = math.pi * d * h.pipe_m_per_m2
        bore = d - 2 * 0.00225
        self.pipe_heat = h.pipe_m_per_m2 * (
            math.pi / 4 * bore**2 * 1000 * CPW + math.pi / 4 * (d**2 - bore**2) * 7850 * 480
        )
        self._soil()

    def _soil(self) -> None:
        from canopy import soil as so

        g = self.c.ground
        low, high = 1.0, 3.0  # growth of the slices, by bisection on the depth
        for _ in range(80):
            mid = 0.5 * (low + high)
            total = so.FIRST_SLICE_M * (mid**so.SLICES - 1) / (mid - 1)
            low, high = (mid, high) if total < so.COLUMN_DEPTH_M else (low, mid)
        thick = so.FIRST_SLICE_M * mid ** np.arange(so.SLICES)
        heat = g.volumetric_heat * thick
        n = so.SLICES
        self.top = 1 / (1 / so.FILM_W_M2_K + g.surface_resistance + thick[0] / 2 / g.conductivity)
        self.film_h = so.FILM_W_M2_K
        bottom = 2 * g.conductivity / thick[-1]
        a = np.zeros((n, n))
        b = np.zeros((n, 2))
        for i in range(n - 1):
            link = 2 * g.conductivity / (thick[i] + thick[i + 1])
            a[i, i] -= link / heat[i]
            a[i, i + 1] += link / heat[i]
            a[i + 1, i + 1] -= link / heat[i + 1]
            a[i + 1, i] += link / heat[i + 1]
        a[0, 0] -= self.top / heat[0]
        b[0, 0] = self.top / heat[0]
        a[-1, -1] -= bottom / heat[-1]
        b[-1, 1] = bottom / heat[-1]
        self.a, self.b = a, b
        step = self.c.outside.step_s
        # augmented [theta, drive, deep, integral of theta_0]
        big = np.zeros((n + 3, n + 3))
        big[:n, :n], big[:n, n : n + 2], big[n + 2, 0] = a, b, 1.0
        self.advance = expm(big * step)
        self.n, self.step = n, step
        self.deep = float(np.mean(self.c.outside.temp_air))

    def soil(self, drive: float, start: np.ndarray | None) -> tuple[float, np.ndarray]:
        """Mean flux into the floor and the column after the hour (settled if there is no past)."""
        if start is None:
            start = np.linalg.solve(self.a, -self.b @ np.array([drive, self.deep]))
        end = self.advance @ np.concatenate([start, [drive, self.deep, 0.0]])
        return self.top * (drive - end[-1] / self.step), end[: self.n]

    def longwave(
        self, k: int, wet: float, floor: float, pipe: float, leaf: float, cover: float
    ) -> np.ndarray:
        """Net long-wave loss of floor, pipe, leaf, cover, and to outside, W/m2 floor (5,)."""
        c = self.c
        dry, moist = c.covering.dry, c.covering.wet
        loss = np.zeros(5)
        e_f, e_p, e_l, e_c = (self.emit(t) for t in (floor, pipe, leaf, cover))
        e_o = self.emit(float(c.outside.temp_air[k]))
        meet = 1.0 - math.exp(-0.5 * self.pipe_area)
        gap = float(c.crop.gap[k])

        def solve(band: int, optics: tuple[float, float, float]) -> np.ndarray:
            t, r_out, r_in = optics
            ef, el = float(c.ground.emissivity[band]), float(c.crop.emissivity[band])
            # unknown fluxes: U1 D1 (floor-pipe) U2 D2 (pipe-leaf) U3 D3 (leaf-cover), J (cover), per m2 floor
            m, rhs = np.zeros((7, 7)), np.zeros(7)
            m[0, 0], m[0, 1], rhs[0] = 1, -(1 - ef), ef * e_f[band]
            tp, rp = 1 - meet, meet * 0.12
            m[1, 2], m[1, 0], m[1, 3], rhs[1] = 1, -tp, -rp, meet * 0.88 * e_p[band]
            m[2, 1], m[2, 3], m[2, 0], rhs[2] = 1, -tp, -rp, meet * 0.88 * e_p[band]
            rl = (1 - gap) * (1 - el)
            m[3, 4], m[3, 2], m[3, 5], rhs[3] = 1, -gap, -rl, (1 - gap) * el * e_l[band]
            m[4, 3], m[4, 5], m[4, 2], rhs[4] = 1, -gap, -rl, (1 - gap) * el * e_l[band]
            # covering inner radiosity J per m2 floor; it sees itself by 1 - 1/size
            own = 1 - 1 / self.size
            sky = self.sky_size * c.outside.sky_bands[band, k] + (self.size - self.sky_size) * e_o[band]
            m[5, 6], m[5, 4], rhs[5] = 1 - r_in * own, -r_in, (1 - t - r_in) * self.size * e_c[band] + t * sky
            m[6, 5], m[6, 6] = 1, -1 / self.size
            u1, d1, u2, d2, u3, d3, j = np.linalg.solve(m, rhs)
            on_cover = u3 + own * j
            up = t * on_cover + (1 - t - r_out) * self.size * e_c[band] + r_out * sky
            return np.array(
                [u1 - d1, (u2 - d2) - (u1 - d1), (u3 - d3) - (u2 - d2), (up - sky) - (u3 - d3), up - sky]
            )

        for band in range(3):
            # a partly wet face: exchange of the dry and of the wet face side by side
            a = solve(
                band,
                tuple(float(x[0, band]) for x in (dry.transmit, dry.reflect_outside, dry.reflect_inside)),
            )
            b = solve(
                band,
                tuple(
                    float(x[0, band]) for x in (moist.transmit, moist.reflect_outside, moist.reflect_inside)
                ),
            )
            loss += (1 - wet) * a + wet * b
        return loss

    def hour(
        self, k: int, x: np.ndarray, opening: float, past: Before | None
    ) -> tuple[np.ndarray, dict[str, float]]:
        """Open amounts of cover, leaf, floor, vapour, air and the heat that the pipe needs, W/m2."""
        c, sh, o = self.c, self.c.shell, self.c.outside
        cover, leaf, floor, e, air, pipe = x
        t_out, p = float(o.temp_air[k]), float(o.pressure[k])
        rho = p / (R_AIR * (ZERO + 0.5 * (t_out + 18.0)))
        kelvin = ZERO + 0.5 * (t_out + 18.0)
        wind = max(float(o.wind_speed[k]), 0.5) * sh.wind_factor
        film0 = 0.0 if past is None else past.film
        wet = min(1.0, film0 / 0.010)
        ratio, out_ratio = RATIO * e / (p - e), RATIO * o.vapour_pressure[k] / (p - o.vapour_pressure[k])
        store = 0.0 if past is None else 1.0 / o.step_s
        # air change
        diff = air - t_out
        leak = (
            sh.leakage_per_hour
            * sh.mean_height_m
            / 3600
            * math.sqrt((1.45e-4 * math.hypot(diff, 0.3) + 1.74e-4 * wind**2) / (1.45e-4 * 20 + 1.74e-4 * 16))
        )
        vent = (
            opening
            * sh.vent_area_ratio
            / 2
            * 0.644
            * sh.vent_factor
            * math.sqrt(G / 2 / kelvin * math.hypot(diff, 0.3) + 0.09 * wind**2)
        )
        speed2 = 0.01 + (16.0 / sh.mean_height_m * vent) ** 2
        dry_air = rho * (leak + vent)
        # convection
        forced = (0.037 * 0.71 ** (1 / 3) * 0.026 * (math.sqrt(speed2) / 1.5e-5) ** 0.8) ** 3
        free = (
            1.7 * math.cos(math.radians(sh.roof_slope_deg)) ** (-2 / 3) if sh.form == "gable" else 2.21
        ) ** 3
        h_in = (free * (math.hypot(air - cover, 0.05) - 0.05) + forced) ** (1 / 3)
        if sh.form == "gable":
            h_out = 2.8 + 1.2 * wind if wind < 4 else 2.5 * wind**0.8
        else:
            h_out = 0.95 + 6.76 * wind**0.49
        half = c.covering.resistance[0] / 2
        q_in = self.size * (air - cover) / (1 / h_in + half)
        q_out = self.size * (cover - t_out) / (1 / h_out + half)
        h_f = ((1.7 if floor > air else 1.2) ** 3 * (math.hypot(floor - air, 0.05) - 0.05) + forced) ** (
            1 / 3
        )
        g = (0.05 * math.hypot(leaf - air, 0.05) + 207 * speed2) ** 0.25 / (1174 * math.sqrt(0.05))
        lai = float(c.crop.lai[k])
        q_leaf = 2 * lai * rho * CP * g * (leaf - air)
        # water
        unit = LAMBDA * RATIO * LEWIS / (p * CP)
        inflow = unit * h_in * (e - float(saturation_pressure(cover))) * o.step_s / LAMBDA
        patchy = inflow < 0 and film0 + inflow < 0.010
        after = film0 / (1 - inflow / 0.010) if patchy else film0 + inflow
        uptake, over = after - film0, max(after - 0.060, 0.0)
        latent_cover = self.size * LAMBDA * uptake / o.step_s
        drain = self.size * CPW * over / o.step_s * (cover - 20.0)
        sun = c.gain_dry
        sunlit = float(c.crop.sunlit_lai[k])

        def light(q: float) -> float:
            return (q + 4.3) / (q + 0.54)

        on = float(sun.crop_sunlit[k]) / (2 * sunlit)
        off = (float(sun.crop[k]) - float(sun.crop_sunlit[k])) / (2 * (lai - sunlit))
        f_light = lai / (sunlit / light(on) + (lai - sunlit) / light(off))
        seen = min(max(leaf, 10.0), 33.0)
        f_temp = 1 + (0.023 * (seen - 24.5) ** 2 if o.sun_up[k] else 0.005 * (seen - 33.6) ** 2)
        stomata = min(82.0 * f_light * f_temp, 5000.0)
        short = float(saturation_pressure(leaf)) - e
        inner = stomata * (1 + short / 400.0) if short > 0 else 0.0
        latent_leaf = 2 * lai * rho * RATIO * LAMBDA / p * short / (1 / g + inner)
        latent_floor = unit * c.ground.wetness * h_f * (float(saturation_pressure(floor)) - e)
        kg_air = float(np.mean(o.pressure)) / (R_AIR * 288.15) * sh.mean_height_m
        full = float(saturation_pressure(air))
        fog = LAMBDA * kg_air / 36.0 * max(ratio - RATIO * full / (p - full), 0.0)
        # pipes, long-wave, ground
        q_pipe = (
            self.pipe_area
            * 1.32
            * (math.hypot(pipe - air, 0.05) / c.heating.pipe_diameter_m) ** 0.25
            * (pipe - air)
        )
        lw_floor, lw_pipe, lw_leaf, lw_cover, lw_out = self.longwave(k, wet, floor, pipe, leaf, cover)
        start = None if past is None else past.soil
        # T* from T_floor: q is linear in T*
        q0, _ = self.soil(0.0, start)
        q1, _ = self.soil(1.0, start)
        drive = (floor + q0 / self.film_h) / (1 - (q1 - q0) / self.film_h)
        q_soil, column = self.soil(drive, start)
        perimeter = sh.perimeter_per_floor * sh.perimeter_loss * (air - t_out)

        def gain(name: str) -> float:
            dry, moist = (getattr(s, name) for s in (c.gain_dry, c.gain_wet))
            a, b = (float(v[0, k] if v.ndim == 2 else v[k]) for v in (dry, moist))
            return (1 - wet) * a + wet * b

        old = past or Before(cover, leaf, air, pipe, ratio, 0.0, np.empty(0))
        cover_store = c.covering.heat_capacity[0] * self.size * (cover - old.cover) * store
        leaf_store = lai * c.crop.water_kg_per_lai * CPW * (leaf - old.leaf) * store
        open_ = np.array(
            [
                gain("covering") + q_in - q_out + latent_cover - drain - lw_cover - cover_store,
                gain("crop") - q_leaf - latent_leaf - lw_leaf - leaf_store,
                gain("ground") - h_f * (floor - air) - latent_floor - lw_floor - q_soil,
                latent_leaf + latent_floor - latent_cover - fog - LAMBDA * dry_air * (ratio - out_ratio)
                - LAMBDA * kg_air * (ratio - old.ratio) * store,
                gain("air") + q_leaf + h_f * (floor - air) + q_pipe + fog
                - fog * CPW / LAMBDA * (air - 20.0) - q_in
                - CP * dry_air * diff - perimeter - kg_air * CP * (air - old.air) * store,
            ]
        )  # fmt: skip
        heat = q_pipe + lw_pipe + self.pipe_heat * (pipe - old.pipe) * store
        more = {"heat": heat, "film": after - over, "ratio": ratio, "out": lw_out, "latent": latent_leaf}
        self.column = column
        return open_, more

    def settle(
        self, k: int, guess: np.ndarray, past: Before | None
    ) -> tuple[np.ndarray, float, dict[str, float]]:
        """Try regimes until one holds: unknowns, opening, extras."""
        climate, heating = self.c.climate, self.c.heating
        heat_at, vent_at = float(climate.heat_at[k]), float(climate.vent_at[k])
        t_out = float(self.c.outside.temp_air[k])
        forced_open = t_out >= vent_at - 0.5
        scale = np.array([10.0, 10.0, 10.0, 1000.0, 10.0, 20.0, 1.0])

        def solve(heat_rule: str, vent_rule: str) -> tuple[np.ndarray, dict[str, float]] | None:
            def open_amounts(z: np.ndarray) -> np.ndarray:
                wild = z * scale
                v = np.clip(wild, [-60, -60, -60, 1, -60, -60, -0.2], [90, 90, 90, 9000, 90, 105, 1.5])
                amounts, more = self.hour(k, v[:6], max(float(v[6]), 0.0), past)
                amounts = amounts + 10.0 * (wild - v)[:5]
                rule = {"hold": 10 * (v[4] - heat_at), "off": more["heat"],
                        "limit": more["heat"] - heating.capacity_w_m2}[heat_rule]  # fmt: skip
                lever = {"shut": 100 * v[6], "full": 100 * (v[6] - 1), "hold": 10 * (v[4] - vent_at)}[
                    vent_rule
                ]
                return np.concatenate([amounts, [rule, lever]])

            start = np.concatenate([guess, [{"shut": 0.0, "full": 1.0, "hold": 0.1}[vent_rule]]])
            for shift in (0.0, 1.5, -1.5, 4.0):
                first = start + np.array([shift, shift, shift, 0.0, shift, shift, 0.0])
                found = root(open_amounts, first / scale, method="hybr", options={"xtol": 1e-11})
                if np.abs(open_amounts(found.x)).max() < 1e-5:
                    v = found.x * scale
                    return v, self.hour(k, v[:6], float(v[6]), past)[1]
            return None

        order = ["full"] if forced_open else ["shut", "hold", "full"]
        for vent_rule in order:
            for heat_rule in ("off", "hold", "limit"):
                found = solve(heat_rule, vent_rule)
                if found is None:
                    continue
                v, more = found
                holds = {
                    "off": v[4] >= heat_at - 1e-6,
                    "hold": -1e-6 <= more["heat"] <= heating.capacity_w_m2 + 1e-6,
                    "limit": v[4] <= heat_at + 1e-6,
                }[heat_rule] and {
                    "shut": v[4] <= vent_at + 1e-6,
                    "hold": 0.0 <= v[6] <= 1.0,
                    "full": forced_open or v[4] >= vent_at - 1e-6,
                }[vent_rule]
                if holds:
                    self.hour(k, v[:6], float(v[6]), past)
                    return v[:6], float(v[6]), more
        raise AssertionError(f"reference: no regime holds in hour {k}")

    def march(self) -> dict[str, np.ndarray]:
        """Temperatures and heat, hour by hour."""
        past: Before | None = None
        t_out = float(self.c.outside.temp_air[0])
        warm = max(float(self.c.climate.heat_at[0]), t_out + 1)
        guess = np.array([0.5 * (warm + t_out), warm, warm, 1300.0, warm, warm + 15])
        rows = []
        for k in range(self.c.outside.temp_air.size):
            guess, opening, more = self.settle(k, guess, past)
            past = Before(guess[0], guess[1], guess[4], guess[5], more["ratio"], more["film"], self.column)
            rows.append([*guess, opening, more["heat"], more["out"], more["latent"]])
        table = np.array(rows).T
        names = ("cover", "leaf", "floor", "vapour", "air", "pipe", "opening", "heat", "out", "latent")
        return dict(zip(names, table, strict=True))
