"""Monte Carlo reference for light paths through houses; `python tests/reference/house_rays.py` writes it.

Ray tracing in three dimensions with low-discrepancy points (scipy.stats.qmc.Sobol), written apart from the
package: every sheet is a polygon or a cylinder, every gutter and ridge a solid box, and each ray is tested
against all of them. Straight light goes backwards from points of the crop plane; light with one mirror bounce
goes forward from points of every sheet. The sheet is Fresnel + Bouguer with n = 1.526, K d = .0185145.
"""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
from scipy.stats import qmc

N_INDEX, DEPTH = 1.526, 0.0185145
LIFT = 1e-7

SHAPES: dict[str, dict[str, float | int | str]] = {
    "one span": {
        "form": "gable",
        "spans": 1,
        "span_width": 8.0,
        "length": 30.0,
        "gutter_height": 3.0,
        "pitch": 26.0,
    },
    "three spans, boxes": {
        "form": "gable",
        "spans": 3,
        "span_width": 6.4,
        "length": 24.0,
        "gutter_height": 4.0,
        "pitch": 24.0,
        "gutter_width": 0.3,
        "gutter_depth": 0.25,
        "ridge_width": 0.12,
        "ridge_depth": 0.15,
    },
    "two pitches, boxes": {
        "form": "gable",
        "spans": 4,
        "span_width": 4.0,
        "length": 20.0,
        "gutter_height": 3.5,
        "pitch": 38.0,
        "pitch_other": 20.0,
        "gutter_width": 0.2,
        "gutter_depth": 0.15,
        "ridge_width": 0.1,
        "ridge_depth": 0.08,
    },
    "steep": {
        "form": "gable",
        "spans": 3,
        "span_width": 5.0,
        "length": 40.0,
        "gutter_height": 2.5,
        "pitch": 52.0,
    },
    "semicircles": {
        "form": "arch",
        "spans": 2,
        "span_width": 6.0,
        "length": 25.0,
        "gutter_height": 2.0,
        "rise": 3.0,
    },
    "flat arches, gutters": {
        "form": "arch",
        "spans": 4,
        "span_width": 8.0,
        "length": 40.0,
        "gutter_height": 3.5,
        "rise": 1.8,
        "gutter_width": 0.3,
        "gutter_depth": 0.2,
    },
    "one tunnel": {
        "form": "arch",
        "spans": 1,
        "span_width": 7.0,
        "length": 30.0,
        "gutter_height": 1.2,
        "rise": 2.4,
    },
}
DEFAULTS = {
    "gutter_width": 0.0,
    "gutter_depth": 0.0,
    "ridge_width": 0.0,
    "ridge_depth": 0.0,
    "crop_plane_height": 1.0,
    "rise": 0.0,
    "pitch": 0.0,
}


def directions() -> np.ndarray:
    """Thirty suns: elevation and azimuth from the ridge, degrees."""
    suns = [(10.0, a) for a in (0.0, 20.0, 45.0, 70.0, 90.0, 200.0, 250.0, 270.0)]
    suns += [(15.0, a) for a in (60.0, 90.0, 240.0, 300.0)]
    suns += [(20.0, a) for a in (30.0, 90.0, 225.0, 270.0)]
    suns += [(30.0, a) for a in (0.0, 50.0, 90.0, 260.0)]
    suns += [(45.0, a) for a in (10.0, 90.0, 280.0)]
    suns += [(60.0, a) for a in (0.0, 80.0, 90.0, 270.0)]
    suns += [(75.0, a) for a in (40.0, 90.0, 270.0)]
    return np.array(suns)


def sheet(cosine: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Transmittance and reflectance of the sheet at cosines of incidence."""
    c1 = np.clip(cosine, 1e-12, 1.0)
    c2 = np.sqrt(1.0 - (1.0 - c1**2) / N_INDEX**2)
    a = np.exp(-DEPTH / c2)
    passed, mirrored = 0.0, 0.0
    for r in (
        ((c1 - N_INDEX * c2) / (c1 + N_INDEX * c2)) ** 2,
        ((N_INDEX * c1 - c2) / (N_INDEX * c1 + c2)) ** 2,
    ):
        t = (1.0 - r) ** 2 * a / (1.0 - (r * a) ** 2)
        passed, mirrored = passed + 0.5 * t, mirrored + 0.5 * r * (1.0 + a * t)
    return np.asarray(passed), np.asarray(mirrored)


class Scene:
    """All faces of one house."""

    def __init__(self, shape: dict) -> None:
        s = {**DEFAULTS, **shape}
        self.s = s
        n, w, length, zg = s["spans"], s["span_width"], s["length"], s["gutter_height"]
        self.x1, self.y1, self.zc = n * w, length, s["crop_plane_height"]
        self.quads: list[tuple[np.ndarray, np.ndarray, np.ndarray]] = []  # corner, edge, edge
        self.gable_z = []
        arch = s["form"] == "arch"
        if arch:
            self.radius = ((w / 2) ** 2 + s["rise"] ** 2) / (2 * s["rise"])
            self.zk = zg + s["rise"] - self.radius
        else:
            right = np.tan(np.radians(s["pitch"]))
            left = np.tan(np.radians(s.get("pitch_other", s["pitch"])))
            rise = w * left * right / (left + right)
            self.top, self.xr = zg + rise, rise / left
            for i in range(n):
                low, up, end = [i * w, 0, zg], [self.xr, 0, rise], [w - self.xr, 0, -rise]
                self.quads.append((np.array(low), np.array(up), np.array([0, length, 0])))
                ridge = [i * w + self.xr, 0, self.top]
                self.quads.append((np.array(ridge), np.array(end), np.array([0, length, 0])))
        for x in (0.0, self.x1):
            self.quads.append((np.array([x, 0, 0]), np.array([0, length, 0]), np.array([0, 0, zg])))
        self.boxes = []
        if s["gutter_width"]:
            h = s["gutter_width"] / 2
            self.boxes += [(i * w - h, i * w + h, zg - s["gutter_depth"], zg) for i in range(n + 1)]
        if s["ridge_width"]:
            h = s["ridge_width"] / 2
            self.boxes += [
                (i * w + self.xr - h, i * w + self.xr + h, self.top - s["ridge_depth"], self.top)
                for i in range(n)
            ]

    def roof_z(self, x: np.ndarray) -> np.ndarray:
        """Height of the roof above x."""
        s = self.s
        at = np.mod(x, s["span_width"])
        if s["form"] == "arch":
            return self.zk + np.sqrt(np.maximum(self.radius**2 - (at - s["span_width"] / 2) ** 2, 0.0))
        return np.minimum(
            s["gutter_height"] + at * (self.top - s["gutter_height"]) / self.xr,
            s["gutter_height"]
            + (s["span_width"] - at) * (self.top - s["gutter_height"]) / (s["span_width"] - self.xr),
        )

    def passes(self, p: np.ndarray, d: np.ndarray, reach: np.ndarray | float = np.inf) -> np.ndarray:
        """Transmission along rays from p (P, 3) towards d, as far as `reach`, of all faces crossed."""
        d = np.broadcast_to(d, p.shape)
        end = reach - 1e-5
        t = np.ones(len(p))
        for corner, a, b in self.quads:
            normal = np.cross(a, b)
            normal = normal / np.linalg.norm(normal)
            nd = d @ normal
            k = ((corner - p) @ normal) / np.where(np.abs(nd) < 1e-12, 1e-12, nd)
            q = p + k[:, None] * d - corner
            u, v = q @ a / (a @ a), q @ b / (b @ b)
            hit = (k > LIFT) & (k < end) & (u >= 0) & (u <= 1) & (v >= 0) & (v <= 1) & (np.abs(nd) > 1e-12)
            t = np.where(hit, t * sheet(np.abs(nd))[0], t)
        for y in (0.0, self.y1):
            dy = np.where(np.abs(d[:, 1]) < 1e-12, 1e-12, d[:, 1])
            k = (y - p[:, 1]) / dy
            q = p + k[:, None] * d
            hit = (k > LIFT) & (k < end) & (q[:, 0] >= 0) & (q[:, 0] <= self.x1) & (q[:, 2] >= 0)
            hit &= q[:, 2] <= self.roof_z(np.clip(q[:, 0], 0.0, self.x1))
            t = np.where(hit, t * sheet(np.abs(d[:, 1]))[0], t)
        if self.s["form"] == "arch":
            t = self._arches(p, d, t, end)
        for x0, x1, z0, z1 in self.boxes:
            t = np.where(self._box(p, d, (x0, x1, z0, z1), end), 0.0, t)
        return t

    def _arches(self, p: np.ndarray, d: np.ndarray, t: np.ndarray, end: np.ndarray | float) -> np.ndarray:
        for i in range(self.s["spans"]):
            xc = (i + 0.5) * self.s["span_width"]
            ox, oz = p[:, 0] - xc, p[:, 2] - self.zk
            a, b = d[:, 0] ** 2 + d[:, 2] ** 2, ox * d[:, 0] + oz * d[:, 2]
            c = ox**2 + oz**2 - self.radius**2
            disc = b * b - a * c
            for sign in (-1.0, 1.0):
                k = (-b + sign * np.sqrt(np.maximum(disc, 0.0))) / np.maximum(a, 1e-15)
                q = p + k[:, None] * d
                hit = (disc > 0) & (k > 1e-6) & (k < end) & (q[:, 2] >= self.s["gutter_height"])
                hit &= (q[:, 1] >= 0) & (q[:, 1] <= self.y1)
                nd = (d[:, 0] * (q[:, 0] - xc) + d[:, 2] * (q[:, 2] - self.zk)) / self.radius
                t = np.where(hit, t * sheet(np.abs(nd))[0], t)
        return t

    def _box(
        self, p: np.ndarray, d: np.ndarray, box: tuple[float, float, float, float], end: np.ndarray | float
    ) -> np.ndarray:
        x0, x1, z0, z1 = box
        near, far = np.full(len(p), LIFT), np.full(len(p), 1.0) * end
        for axis, low, high in ((0, x0, x1), (1, 0.0, self.y1), (2, z0, z1)):
            step = np.where(np.abs(d[:, axis]) < 1e-12, 1e-12, d[:, axis])
            k0, k1 = (low - p[:, axis]) / step, (high - p[:, axis]) / step
            near, far = np.maximum(near, np.minimum(k0, k1)), np.minimum(far, np.maximum(k0, k1))
        return near < far

    def straight(self, s: np.ndarray, uv: np.ndarray) -> float:
        """Mean transmission of straight light over the crop plane."""
        p = np.stack([uv[:, 0] * self.x1, uv[:, 1] * self.y1, np.full(len(uv), self.zc)], axis=1)
        return float(self.passes(p, s).mean())

    def bounce(self, s: np.ndarray, uv: np.ndarray) -> float:
        """Light that comes down after one mirror bounce, per light on the horizontal."""
        total = 0.0
        for p, normal, area in self._faces(uv):
            sn = normal @ s if normal.ndim > 1 else np.full(len(p), normal @ s)
            out = s - 2.0 * sn[:, None] * normal  # towards where mirrored light would come from
            go = -out
            down = go[:, 2] < -1e-9
            k = (self.zc - p[:, 2]) / np.where(down, go[:, 2], -1.0)
            land = p + k[:, None] * go
            ok = down & (k > 0) & (land[:, 0] >= 0) & (land[:, 0] <= self.x1)
            ok &= (land[:, 1] >= 0) & (land[:, 1] <= self.y1)
            if not ok.any():
                continue
            up = np.broadcast_to(s, p.shape)[ok]
            # the way from the crop ends just before the mirror, the way to the sun begins just beyond it
            value = self.passes(p[ok] + 1e-6 * up, up) * self.passes(land[ok], -go[ok], k[ok])
            value = value * sheet(np.abs(sn[ok]))[1]
            total += float((value * np.abs(sn[ok])).sum() / len(p)) * area
        return total / (s[2] * self.x1 * self.y1)

    def _faces(self, uv: np.ndarray):
        for corner, a, b in self.quads:
            normal = np.cross(a, b)
            area = float(np.linalg.norm(normal))
            yield corner + uv[:, :1] * a + uv[:, 1:] * b, normal / area, area
        width, high = self.x1, float(self.roof_z(np.linspace(0, self.x1, 20001)).max())
        for y in (0.0, self.y1):
            p = np.stack([uv[:, 0] * width, np.full(len(uv), y), uv[:, 1] * high], axis=1)
            p = p[p[:, 2] <= self.roof_z(p[:, 0])]
            yield p, np.array([0.0, 1.0, 0.0]), width * high * len(p) / len(uv)
        if self.s["form"] == "arch":
            edge = 2.0 * np.arctan2(self.s["rise"], self.s["span_width"] / 2)
            for i in range(self.s["spans"]):
                turn = (2.0 * uv[:, 0] - 1.0) * edge
                normal = np.stack([np.sin(turn), np.zeros(len(uv)), np.cos(turn)], axis=1)
                p = normal * self.radius
                p += np.array([(i + 0.5) * self.s["span_width"], 0.0, self.zk])
                p[:, 1] = uv[:, 1] * self.y1
                yield p, normal, 2.0 * edge * self.radius * self.y1


def sun(elevation: float, turn: float) -> np.ndarray:
    """Unit vector towards the sun; azimuth from the ridge, the ridge along y."""
    e, a = np.radians(elevation), np.radians(turn)
    return np.array([np.cos(e) * np.sin(a), np.cos(e) * np.cos(a), np.sin(e)])


def main() -> None:
    """Write the references."""
    many = qmc.Sobol(2, seed=11).random_base2(18)
    some = qmc.Sobol(2, seed=12).random_base2(16)
    result = {}
    for name, shape in SHAPES.items():
        scene = Scene(shape)
        rows = []
        for elevation, turn in directions():
            s = sun(elevation, turn)
            rows.append([elevation, turn, scene.straight(s, many), scene.bounce(s, some)])
        result[name] = {"house": {**DEFAULTS, **shape}, "rays": [[round(x, 6) for x in r] for r in rows]}
        print(name, flush=True)
    Path(__file__).with_suffix(".json").write_text(json.dumps(result, indent=1) + "\n")


if __name__ == "__main__":
    main()
