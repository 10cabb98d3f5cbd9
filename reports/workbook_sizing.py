"""The sizing sheet: sizes side by side, design nights, part load, boilers, stores, degree days, years."""

from __future__ import annotations

from typing import Any, Final

import numpy as np

from canopy.cautions import CAUTIONS
from canopy.run import CandidateRun
from canopy.sizing import Sizing
from canopy.sizingwords import hour_words
from reports.workbook_base import AREA_ROW, Book, cell, colour, row_head, span, subtitle
from reports.workbook_energy import energy_table
from reports.workbook_night import night_table

SIZES: Final = (
    ("peak_w_m2", "highest simulated hour", "W/m2"),
    ("peak_at", "when", ""),
    ("load_exceeded_35_h_w_m2", "load exceeded in 35 h a year (99.6 %)", "W/m2"),
    ("load_exceeded_88_h_w_m2", "load exceeded in 88 h a year (99 %)", "W/m2"),
    ("design_night_w_m2", "design night", "W/m2"),
    ("design_outside_c", "outside on the design night", "°C"),
    ("annual_heat_kwh_m2", "annual heat", "kWh/m2"),
    ("full_load_hours", "full-load hours of the design heat", "h"),
    ("design_heat_kw", "design heat", "kW"),
    ("margin_pct", "margin", "%"),
    ("boiler_kw", "boiler, heat output", "kW"),
)


def sizing_sheet(book: Book) -> None:
    """Write the sizing of every candidate, one column each, then the details one below the other."""
    sheet = book.sheet("Sizing")
    book.text(sheet, 0, 0, "Size of the heating, m2 of floor", book.title)
    sheet.set_column(0, 0, 46)
    sheet.set_column(1, 1, 14)
    sheet.set_column(2, 40, 18)
    row = _sizes(book, sheet)
    for at, one in enumerate(book.run.candidates):
        row = night_table(book, sheet, row + 2, at, one)
    for write in (_part_load, _coverage, _stores, energy_table, _degree_days, _years):
        row = write(book, sheet, row + 2)
    row += 2
    subtitle(book, sheet, row, "Cautions")
    for at, words in enumerate(CAUTIONS, start=1):
        book.text(sheet, row + at, 0, words)
    _charts(book, sheet, row + len(CAUTIONS) + 3)
    sheet.freeze_panes(3, 2)


def _columns(book: Book) -> list[tuple[int, CandidateRun, Sizing]]:
    """Return column, candidate and sizing of every candidate that has one."""
    return [(2 + k, c, c.sizing) for k, c in enumerate(book.run.candidates) if c.sizing is not None]


def _sizes(book: Book, sheet: Any) -> int:
    book.text(sheet, 2, 0, "quantity", book.head)
    book.text(sheet, 2, 1, "unit", book.head)
    row_head(book, sheet, AREA_ROW, "floor", "m2")
    for at, (_, words, unit) in enumerate(SIZES, start=AREA_ROW + 1):
        row_head(book, sheet, at, words, unit)
    last = AREA_ROW + len(SIZES)
    row_head(book, sheet, last + 1, "taken from", "")
    for k, one in enumerate(book.run.candidates):
        book.text(sheet, 2, 2 + k, one.plan.name, book.head)
        book.put(sheet, AREA_ROW, 2 + k, one.house.floor_area, "m2")
    for col, _, found in _columns(book):
        for at, (name, _, unit) in enumerate(SIZES, start=AREA_ROW + 1):
            value = getattr(found, name)
            if name == "peak_at":
                book.text(sheet, at, col, hour_words(value) if found.peak_w_m2 > 0 else "-")
            elif name == "boiler_kw":
                kw, margin = cell(at - 2, col), cell(at - 1, col)
                how = book.shown("kW")
                shown_kw = float(how.convert(found.boiler_kw))
                text = f"={kw}*(1+{margin}/100)"
                book.formula(sheet, at, col, text, shown_kw, how.number_format, bold=True)
            else:
                book.put(sheet, at, col, float(value), unit)
        book.text(sheet, last + 1, col, found.basis, book.wrap)
    sheet.set_row(last + 1, 30)
    sheet.set_row(2, 30)
    last += 1
    for name, words, unit in (
        ("deficit_h", "proposed boiler run through the record: hours short", "h"),
        ("lowest_air_c", "lowest house air with it", "°C"),
    ):
        last += 1
        row_head(book, sheet, last, words, unit)
        for col, _, found in _columns(book):
            if found.finite is not None:
                book.put(sheet, last, col, float(getattr(found.finite, name)), unit)
    return last


def _part_load(book: Book, sheet: Any, row: int) -> int:
    subtitle(book, sheet, row, "Hours at part load, by share of the design heat")
    columns = _columns(book)
    if not columns:
        return row
    edges = columns[0][2].curve.part_load_edges
    row_head(book, sheet, row + 1, "no heating", "h")
    for k in range(len(edges) - 1):
        upper = "and more" if k == len(edges) - 2 else f"to {edges[k + 1]:.0%}"
        row_head(book, sheet, row + 2 + k, f"{edges[k]:.0%} {upper}", "h")
    end = row + 1 + len(edges)
    row_head(book, sheet, end, "hours of the record", "h")
    for col, _, found in columns:
        values = np.concatenate(([found.curve.idle_h], found.curve.part_load))
        for k, value in enumerate(values):
            book.put(sheet, row + 1 + k, col, float(value), "h")
        text = f"=SUM({cell(row + 1, col)}:{cell(end - 1, col)})"
        book.formula(sheet, end, col, text, float(values.sum()), "0.0", bold=True)
    return end


def _coverage(book: Book, sheet: Any, row: int) -> int:
    subtitle(book, sheet, row, "Share of the heat that a smaller boiler covers, by share of the design heat")
    columns = _columns(book)
    if not columns:
        return row
    sizes = columns[0][2].curve.size_share
    for k, share in enumerate(sizes, start=1):
        row_head(book, sheet, row + k, f"boiler of {share:.0%} of the design heat", "")
        for col, _, found in columns:
            sheet.write_number(row + k, col, float(found.curve.heat_share[k - 1]), book.number("0.0%"))
    end = row + len(sizes) + 1
    row_head(book, sheet, end, "largest base-load unit with 4000 full-load hours a year", "W/m2")
    for col, _, found in columns:
        book.put(sheet, end, col, found.curve.base_load_w_m2, "W/m2")
    return end


def _stores(book: Book, sheet: Any, row: int) -> int:
    subtitle(
        book, sheet, row,
        "Smallest boiler with a heat store: exact, every coming hour known, before the operating reserve",
    )  # fmt: skip
    end = row
    for col, one, found in _columns(book):
        del col
        stores = found.stores
        end += 1
        words = (
            f"{one.plan.name}: spread {book.shown('K').convert(stores.spread_k):.0f} {book.shown('K').text}, "
            f"standing loss {stores.standing_loss_per_h:.2%} an hour"
        )
        book.text(sheet, end, 0, words)
        rows = (
            ("store volume", "m3/1000 m2", stores.volume_m3),
            ("usable heat", "kWh/m2", stores.capacity_kwh_m2),
            ("smallest boiler", "W/m2", stores.boiler_w_m2),
        )
        for name, unit, values in rows:
            end += 1
            row_head(book, sheet, end, f"    {name}", unit)
            for k, value in enumerate(values):
                book.put(sheet, end, 2 + k, float(value), unit)
        end += 1
        how = book.shown("W/m2")
        row_head(book, sheet, end, f"    with {stores.reserve_pct:.0f} % operating reserve", "W/m2")
        for k, value in enumerate(stores.with_reserve_w_m2):
            text = f"={cell(end - 1, 2 + k)}*{1.0 + stores.reserve_pct / 100.0!r}"
            book.formula(sheet, end, 2 + k, text, float(how.convert(value)), how.number_format)
    return end


def _degree_days(book: Book, sheet: Any, row: int) -> int:
    columns = _columns(book)
    subtitle(book, sheet, row, "Heating degree days of the record by base temperature")
    if not columns:
        return row
    days = columns[0][2].degree_days
    row_head(book, sheet, row + 1, "base", "°C")
    row_head(book, sheet, row + 2, "from hours", "K d")
    row_head(book, sheet, row + 3, "from daily means", "K d")
    for k, base in enumerate(days.bases_c):
        book.put(sheet, row + 1, 2 + k, float(base), "°C")
        book.put(sheet, row + 2, 2 + k, float(days.hourly[k]), "K d")
        book.put(sheet, row + 3, 2 + k, float(days.daily_mean[k]), "K d")
    end = row + 3
    for spell in columns[0][2].spells:
        end += 1
        row_head(book, sheet, end, f"coldest mean over {spell.hours} h, and its start", "°C")
        book.put(sheet, end, 2, spell.mean_c, "°C")
        book.text(sheet, end, 3, hour_words(spell.start))
    return end


def _years(book: Book, sheet: Any, row: int) -> int:
    subtitle(book, sheet, row, "Several years")
    columns = [(one, found.many) for _, one, found in _columns(book) if found.many is not None]
    if not columns:
        book.text(sheet, row + 1, 0, "not computed: the record holds less than two whole years of one series")
        return row + 1
    end = row
    for one, many in columns:
        book.text(sheet, end + 1, 0, f"{one.plan.name}: {many.note}")
        row_head(book, sheet, end + 2, "year", "")
        row_head(book, sheet, end + 3, "highest hour", "W/m2")
        row_head(book, sheet, end + 4, "annual heat", "kWh/m2")
        row_head(book, sheet, end + 5, "coldest hour outside", "°C")
        for k, year in enumerate(many.years):
            sheet.write_number(end + 2, 2 + k, year, book.number("0"))
            book.put(sheet, end + 3, 2 + k, float(many.peak_w_m2[k]), "W/m2")
            book.put(sheet, end + 4, 2 + k, float(many.annual_heat_kwh_m2[k]), "kWh/m2")
            book.put(sheet, end + 5, 2 + k, float(many.coldest_hour_c[k]), "°C")
        end += 5
        for level in many.levels:
            end += 1
            row_head(book, sheet, end, f"once in {level.years:.0f} years: level, 90 % from, to", "W/m2")
            for k, value in enumerate((level.level, level.low, level.high)):
                book.put(sheet, end, 2 + k, value, "W/m2")
    return end


def _charts(book: Book, sheet: Any, row: int) -> None:
    """Write the duration curves as numbers and draw them beside the sizes."""
    columns = _columns(book)
    if not columns:
        return
    subtitle(book, sheet, row, "Load-duration curve: hours in which the load is at least ...")
    count = len(columns[0][2].curve.hours)
    row_head(book, sheet, row + 1, "hours, loads to the right", "W/m2")
    chart = book.book.add_chart({"type": "scatter", "subtype": "straight"})
    how = book.shown("W/m2")
    for k in range(count):
        book.put(sheet, row + 2 + k, 1, float(columns[0][2].curve.hours[k]), "h")
    for col, one, found in columns:
        book.text(sheet, row + 1, col, one.plan.name, book.unit)
        sheet.write_column(
            row + 2, col, how.convert(found.curve.load).tolist(), book.number(how.number_format)
        )
        chart.add_series(
            {
                "name": one.plan.name,
                "categories": "=" + span("Sizing", row + 2, row + 1 + count, 1),
                "values": "=" + span("Sizing", row + 2, row + 1 + count, col),
                "line": {"color": colour(col - 2), "width": 1.5},
            }
        )
    chart.set_title({"name": "How many hours need how much heat", "name_font": {"size": 11}})
    chart.set_x_axis({"name": "hours", "min": 0})
    chart.set_y_axis({"name": how.text, "min": 0})
    chart.set_legend({"position": "bottom"})
    side = 3 + len(book.run.candidates)
    sheet.insert_chart(3, max(side, 9), chart, {"x_scale": 1.4, "y_scale": 1.4})
