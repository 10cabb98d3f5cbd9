"""Photon tracing in a leaf canopy, closed or in hedgerows: a reference that shares no code with the planner.

Leaves are points of a turbid medium in boxes of endless length; each hit draws a leaf from the ellipsoidal
angle distribution (by rejection on its projection), and the photon leaves by Lambert's law on either side.
"""

from __future__ import annotations

import math
import random

import numba
import numpy as np

TABLE = 4000


def inclination_table(chi: float) -> np.ndarray:
    """Return leaf inclinations at even steps of their cumulative distribution (Campbell 1990 density)."""
    angle = np.linspace(0.0, math.pi / 2, 40001)
    density = np.sin(angle) / (np.cos(angle) ** 2 + chi**2 * np.sin(angle) ** 2) ** 2
    total = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]))])
    return np.interp(np.linspace(0.0, 1.0, TABLE + 1), total / total[-1], angle)


def mean_projection(chi: float) -> np.ndarray:
    """Return the mean projection of leaves on rays at 0 ... 90 degrees from the vertical, by brute force."""
    inclination = inclination_table(chi)[::10]
    inclination = 0.5 * (inclination[1:] + inclination[:-1])
    turn = (np.arange(360) + 0.5) * (math.pi / 360)
    out = np.empty(901)
    for k in range(901):
        angle = math.radians(k / 10.0)
        rim = np.sin(inclination) * math.sin(angle)
        out[k] = np.abs(np.cos(inclination) * math.cos(angle) + rim * np.cos(turn)[:, None]).mean()
    return out


@numba.njit(cache=False)
def _meet(projection, z):
    place = math.degrees(math.acos(min(abs(z), 1.0))) * 10.0
    k = min(int(place), 899)
    return projection[k] + (place - k) * (projection[k + 1] - projection[k])


@numba.njit(cache=False)
def _leaf_metres(x, z, dx, dz, width, spacing, height, wanted):
    """Walk until `wanted` metres lie inside boxes: (metres inside, x, z) at that point or at an end."""
    inside = 0.0
    half = 0.5 * width
    while True:
        away = z / -dz if dz < 0.0 else (height - z) / dz  # to floor or top
        local = x - spacing * math.floor(x / spacing + 0.5)
        in_row = abs(local) < half or width >= spacing
        if abs(dx) < 1e-12 or width >= spacing:
            edge = 1e30
        elif in_row:
            edge = (half - local) / dx if dx > 0.0 else (half + local) / -dx
        elif dx > 0.0:
            edge = (-half - local if local < 0.0 else spacing - half - local) / dx
        else:
            edge = (local - half if local > 0.0 else local + spacing - half) / -dx
        step = min(away, edge + 1e-9)
        if in_row and inside + step >= wanted:
            left = wanted - inside
            return wanted, x + left * dx, z + left * dz
        if in_row:
            inside += step
        x += step * dx
        z += step * dz
        if away <= edge:
            return inside, x, (0.0 if dz < 0.0 else height)


@numba.njit(cache=False)
def _scatter(inclination, reflect, transmit, dx, dy, dz):
    while True:
        angle = inclination[int(random.random() * TABLE)]
        turn = 2.0 * math.pi * random.random()
        nx, ny, nz = math.sin(angle) * math.cos(turn), math.sin(angle) * math.sin(turn), math.cos(angle)
        meet = dx * nx + dy * ny + dz * nz
        if random.random() < abs(meet):
            break
    side = 1.0 if meet > 0.0 else -1.0  # of travel
    if random.random() * (reflect + transmit) < reflect:
        side = -side
    nx, ny, nz = side * nx, side * ny, side * nz
    cos = math.sqrt(random.random())
    sin = math.sqrt(1.0 - cos * cos)
    turn = 2.0 * math.pi * random.random()
    # any two axes across the normal
    if abs(nz) < 0.9:
        ax, ay, az = -ny, nx, 0.0
    else:
        ax, ay, az = 0.0, -nz, ny
    size = math.sqrt(ax * ax + ay * ay + az * az)
    ax, ay, az = ax / size, ay / size, az / size
    bx, by, bz = ny * az - nz * ay, nz * ax - nx * az, nx * ay - ny * ax
    p, q = sin * math.cos(turn), sin * math.sin(turn)
    return cos * nx + p * ax + q * bx, cos * ny + p * ay + q * by, cos * nz + p * az + q * bz


@numba.njit(cache=False)
def _lambert(sign):
    z = math.sqrt(random.random())
    turn = 2.0 * math.pi * random.random()
    sin = math.sqrt(1.0 - z * z)
    return sin * math.cos(turn), sin * math.sin(turn), sign * z


@numba.njit(cache=False)
def trace(inclination, projection, lai, box, reflect, transmit, floor, sun, diffuse, photons, seed):
    """Return shares absorbed by leaves, by the floor, sent up, absorbed by leaves in the sun.

    box: (width, spacing, height); sun: direction of travel of the beam (x across the rows).
    """
    random.seed(seed)
    width, spacing, height = box
    dense = lai * spacing / (min(width, spacing) * height)
    scatter = reflect + transmit
    crop = ground = up = sunlit = 0.0
    sun_meet = dense * _meet(projection, sun[2])
    for _ in range(photons):
        x, z, weight, first = spacing * random.random(), height, 1.0, not diffuse
        dx, dy, dz = sun
        if diffuse:
            dx, dy, dz = _lambert(-1.0)
        while True:
            thick = dense * _meet(projection, dz)
            wanted = -math.log(1.0 - random.random()) / thick
            inside, x, z = _leaf_metres(x, z, dx, dz, width, spacing, height, wanted)
            if inside < wanted:
                if z > 0.0:
                    up += weight
                    break
                ground += weight * (1.0 - floor)
                weight *= floor
                dx, dy, dz = _lambert(1.0)
            else:
                taken = weight * (1.0 - scatter)
                crop += taken
                if first:
                    sunlit += taken
                else:
                    shade, _, _ = _leaf_metres(x, z, -sun[0], -sun[2], width, spacing, height, 1e30)
                    sunlit += taken * math.exp(-shade * sun_meet)
                weight *= scatter
                dx, dy, dz = _scatter(inclination, reflect, transmit, dx, dy, dz)
            first = False
            if weight < 0.05:
                if random.random() > 0.2:
                    break
                weight *= 5.0
    return crop / photons, ground / photons, up / photons, sunlit / photons


def travel(zenith_deg: float, across_deg: float) -> tuple[float, float, float]:
    """Return a beam's direction of travel; across_deg is its azimuth from the direction of the rows."""
    z, a = math.radians(zenith_deg), math.radians(across_deg)
    return -math.sin(z) * math.sin(a), -math.sin(z) * math.cos(a), -math.cos(z)
