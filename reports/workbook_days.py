"""Daily sheets, monthly sheet and comparison: days are numbers, whatever adds them up is a formula."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from canopy.columns import DAILY, Column, How, day_unit
from canopy.run import CandidateRun
from reports.workbook_base import FIRST_ROW, TOTALS_ROW, Book, cell, colour, day_sheet, span

Floats = NDArray[np.float64]

FUNCTION: Final[dict[str, str]] = {"min": "MIN", "max": "MAX", "mean": "AVERAGE"}  # everything else: SUM
PLACE: Final = {name: at + 1 for at, (name, _, _) in enumerate(DAILY)}  # column on a daily sheet
COMPARED: Final = (
    "outside_par_mol_m2",
    "inside_par_mol_m2",
    "crop_par_absorbed_mol_m2",
    "crop_nir_absorbed_kwh_m2",
    "heat_delivered_kwh_m2",
    "heat_for_humidity_kwh_m2",
    "sky_loss_kwh_m2",
    "through_loss_kwh_m2",
    "night_sky_loss_kwh_m2",
    "convection_loss_kwh_m2",
    "air_change_loss_kwh_m2",
    "venting_kwh_m2",
    "transpiration_kg_m2",
    "condensation_kg_m2",
    "temp_air_min_c",
    "leaf_min_c",
    "below_setpoint_h",
    "frost_h",
    "wet_covering_h",
)
STORED_DIGITS: Final = 6  # far beyond what is printed, and a third less to write
LOOK: Final = {"min": ", lowest", "max": ", highest", "mean": ", mean", "hours": " (hours)"}


def shown_days(book: Book, one: CandidateRun, name: str, unit: str) -> Floats:
    """Return one daily column as the workbook holds it: in the shown unit, to the sixth decimal."""
    return np.round(book.shown(unit).convert(one.daily[name]), STORED_DIGITS)


def heading(column: Column, how: How) -> str:
    """Return the words above a daily column."""
    return column.title + LOOK.get(how, "")


def add_up(values: Floats, how: str) -> float:
    """Return what the sheet's formula gives: MIN, MAX and AVERAGE pass over empty cells."""
    there = values[np.isfinite(values)]
    if not len(there):
        return float("nan")
    if how == "min":
        return float(there.min())
    if how == "max":
        return float(there.max())
    if how == "mean":
        return float(there.mean())
    return float(there.sum())


def daily_sheet(book: Book, at: int, one: CandidateRun) -> None:
    """Write one candidate's days: headings, names in daily.csv, units, season formulas, then the days."""
    sheet = book.sheet(day_sheet(at))
    run, last = book.run, FIRST_ROW + len(book.run.days) - 1
    book.text(sheet, 0, 0, f"{day_sheet(at)}: {one.plan.name} - one row per day, m2 of floor", book.title)
    for row, words in enumerate(("day", "column in daily.csv (SI)", "unit", "season"), start=1):
        book.text(sheet, row, 0, words, book.head if row == 1 else book.bold)
    sheet.set_column(0, 0, 24, book.day)
    sheet.set_row(1, 62)
    sheet.set_row(2, 26)
    for row, day in enumerate(run.days.astype("datetime64[D]").tolist(), start=FIRST_ROW):
        sheet.write_datetime(row, 0, day, book.day)
    for name, column, how in DAILY:
        place = PLACE[name]
        unit = book.shown(day_unit(column, how))
        values = shown_days(book, one, name, day_unit(column, how))
        sheet.set_column(place, place, 11, book.number(unit.number_format))
        book.text(sheet, 1, place, heading(column, how), book.head)
        book.text(sheet, 2, place, name, book.name)
        book.text(sheet, 3, place, unit.text, book.unit)
        function = f"={FUNCTION.get(how, 'SUM')}({cell(FIRST_ROW, place)}:{cell(last, place)})"
        total = add_up(values, how)
        book.formula(sheet, TOTALS_ROW, place, function, total, unit.number_format, bold=True)
        write_column(sheet, FIRST_ROW, place, values)
    sheet.freeze_panes(FIRST_ROW, 1)
    chart = days_chart(book, [(at, one)], f"Heat and outside air by day: {one.plan.name}")
    sheet.insert_chart(FIRST_ROW, len(DAILY) + 2, chart, {"x_scale": 1.8, "y_scale": 1.4})


def write_column(sheet: Any, row: int, col: int, values: Floats) -> None:
    """Write numbers one below the other; a day without a value stays empty."""
    if np.isfinite(values).all():
        sheet.write_column(row, col, values.tolist())
        return
    for at, value in enumerate(values.tolist()):
        if np.isfinite(value):
            sheet.write_number(row + at, col, value)


def days_chart(book: Book, some: list[tuple[int, CandidateRun]], title: str) -> Any:
    """Return a line chart of daily heat, with the outside air on a second axis for a single candidate."""
    last = FIRST_ROW + len(book.run.days) - 1
    chart = book.book.add_chart({"type": "line"})
    heat, air = PLACE["heat_delivered_kwh_m2"], PLACE["outside_temp_mean_c"]
    for at, one in some:
        name = day_sheet(at)
        chart.add_series(
            {
                "name": one.plan.name if len(some) > 1 else "heat delivered",
                "categories": "=" + span(name, FIRST_ROW, last, 0),
                "values": "=" + span(name, FIRST_ROW, last, heat),
                "line": {"color": colour(at), "width": 1.25},
            }
        )
    if len(some) == 1:
        name = day_sheet(some[0][0])
        chart.add_series(
            {
                "name": "outside air, mean",
                "categories": "=" + span(name, FIRST_ROW, last, 0),
                "values": "=" + span(name, FIRST_ROW, last, air),
                "y2_axis": True,
                "line": {"color": "#999999", "width": 1.0, "dash_type": "dash"},
            }
        )
        chart.set_y2_axis({"name": book.shown("°C").text})
    _style(chart, title, f"{book.shown('kWh/m2').text} a day")
    chart.set_x_axis({"date_axis": True, "num_format": "d mmm", "major_unit": 1, "major_unit_type": "months"})
    return chart


def _style(chart: Any, title: str, y_name: str) -> None:
    chart.set_title({"name": title, "name_font": {"size": 11}})
    chart.set_y_axis({"name": y_name, "major_gridlines": {"visible": True, "line": {"color": "#dddddd"}}})
    chart.set_legend({"position": "bottom"})


def monthly_sheet(book: Book) -> None:
    """Write the months of every candidate as formulas over the daily sheets."""
    run, sheet = book.run, book.sheet("Monthly")
    book.text(sheet, 0, 0, "Months, added up from the daily sheets", book.title)
    for col, words in enumerate(("candidate", "month")):
        book.text(sheet, 1, col, words, book.head)
    months = run.days.astype("datetime64[M]").astype(str)
    rows = [np.flatnonzero(months == month) for month in run.months]
    for name, column, how in DAILY:
        unit, col = book.shown(day_unit(column, how)), PLACE[name] + 1
        sheet.set_column(col, col, 11)
        book.text(sheet, 1, col, heading(column, how), book.head)
        book.text(sheet, 2, col, name, book.name)
        book.text(sheet, 3, col, unit.text, book.unit)
        for at, one in enumerate(run.candidates):
            values = shown_days(book, one, name, day_unit(column, how))
            for m, inside in enumerate(rows):
                first, last = FIRST_ROW + int(inside[0]), FIRST_ROW + int(inside[-1])
                text = f"={FUNCTION.get(how, 'SUM')}({span(day_sheet(at), first, last, PLACE[name])})"
                row = 4 + at * len(rows) + m
                book.formula(sheet, row, col, text, add_up(values[inside], how), unit.number_format)
    for at, one in enumerate(run.candidates):
        for m, month in enumerate(run.months):
            book.text(sheet, 4 + at * len(rows) + m, 0, one.plan.name)
            book.text(sheet, 4 + at * len(rows) + m, 1, month)
    sheet.set_column(0, 0, 28)
    sheet.set_row(1, 62)
    sheet.set_row(2, 26)
    sheet.freeze_panes(4, 2)
    below = 4 + len(run.candidates) * len(rows) + 1
    for k, name in enumerate(("heat_delivered_kwh_m2", "inside_par_mol_m2")):
        sheet.insert_chart(below, 2 + 9 * k, _months_chart(book, name), {"x_scale": 1.3, "y_scale": 1.2})


def _months_chart(book: Book, name: str) -> Any:
    run, count = book.run, len(book.run.months)
    column, how = next((c, h) for n, c, h in DAILY if n == name)
    chart = book.book.add_chart({"type": "column"})
    for at, one in enumerate(run.candidates):
        first, last = 4 + at * count, 3 + (at + 1) * count
        chart.add_series(
            {
                "name": one.plan.name,
                "categories": "=" + span("Monthly", first, last, 1),
                "values": "=" + span("Monthly", first, last, PLACE[name] + 1),
                "fill": {"color": colour(at)},
            }
        )
    _style(chart, heading(column, how), book.shown(day_unit(column, how)).text)
    return chart


def comparison_sheet(book: Book) -> None:
    """Write one row per candidate: season figures as formulas over the daily sheets, and the heating size."""
    run, sheet = book.run, book.sheet("Comparison")
    book.text(sheet, 0, 0, "Candidates side by side, whole season, m2 of floor", book.title)
    book.text(sheet, 1, 0, "candidate", book.head)
    book.text(sheet, 1, 1, "daily sheet", book.head)
    by_name = {name: (column, how) for name, column, how in DAILY}
    for col, name in enumerate(COMPARED, start=2):
        column, how = by_name[name]
        unit = book.shown(day_unit(column, how))
        book.text(sheet, 1, col, heading(column, how), book.head)
        book.text(sheet, 2, col, unit.text, book.unit)
        for at, one in enumerate(run.candidates):
            value = add_up(shown_days(book, one, name, day_unit(column, how)), how)
            text = f"='{day_sheet(at)}'!{cell(TOTALS_ROW, PLACE[name])}"
            book.formula(sheet, 3 + at, col, text, value, unit.number_format)
    for at, one in enumerate(run.candidates):
        book.text(sheet, 3 + at, 0, one.plan.name, book.wrap)
        book.text(sheet, 3 + at, 1, day_sheet(at))
    _ratios(book, sheet, 2 + len(COMPARED))
    sheet.set_column(0, 0, 34)
    sheet.set_column(1, 40, 12)
    sheet.set_row(1, 62)
    sheet.freeze_panes(3, 1)
    below = 3 + len(run.candidates) + 1
    everyone = list(enumerate(run.candidates))
    bars = (("heat_delivered_kwh_m2", 0), ("inside_par_mol_m2", 5))
    for name, col in bars:
        sheet.insert_chart(below, col, _bars(book, name), {"x_scale": 1.2, "y_scale": 1.2})
    lines = days_chart(book, everyone, "Heat delivered by day")
    sheet.insert_chart(below + 19, 0, lines, {"x_scale": 2.2, "y_scale": 1.4})


def _ratios(book: Book, sheet: Any, col: int) -> None:
    """Write light share, heat against the first candidate and the heating size beside the season."""
    run = book.run
    heads = (
        "share of outside PAR at the crop",
        "heat against the first",
        "highest hour",
        "design night",
        "boiler",
    )
    book.heading(sheet, 1, col, heads, ("share", "share", "W/m2", "W/m2", "kW"))
    where = {name: at for at, name in enumerate(COMPARED, start=2)}
    first_heat = float(run.candidates[0].daily["heat_delivered_kwh_m2"].sum())
    for at, one in enumerate(run.candidates):
        row = 3 + at
        outside, inside = (float(one.daily[f"{side}_par_mol_m2"].sum()) for side in ("outside", "inside"))
        over, under = cell(row, where["inside_par_mol_m2"]), cell(row, where["outside_par_mol_m2"])
        share = inside / outside if outside > 0 else float("nan")
        book.formula(sheet, row, col, f'=IF({under}>0,{over}/{under},"")', share, "0.0%")
        heat, base = cell(row, where["heat_delivered_kwh_m2"]), cell(3, where["heat_delivered_kwh_m2"], True)
        mine = float(one.daily["heat_delivered_kwh_m2"].sum())
        ratio = mine / first_heat if first_heat > 0 else float("nan")
        book.formula(sheet, row, col + 1, f'=IF({base}>0,{heat}/{base},"")', ratio, "0%")
        if one.sizing is not None:
            book.put(sheet, row, col + 2, one.sizing.peak_w_m2, "W/m2")
            book.put(sheet, row, col + 3, one.sizing.design_night_w_m2, "W/m2")
            book.put(sheet, row, col + 4, one.sizing.boiler_kw, "kW")


def _bars(book: Book, name: str) -> Any:
    column, how = next((c, h) for n, c, h in DAILY if n == name)
    col, last = 2 + COMPARED.index(name), 2 + len(book.run.candidates)
    chart = book.book.add_chart({"type": "bar"})
    chart.add_series(
        {
            "name": heading(column, how),
            "categories": "=" + span("Comparison", 3, last, 0),
            "values": "=" + span("Comparison", 3, last, col),
            "points": [{"fill": {"color": colour(at)}} for at in range(len(book.run.candidates))],
            "gap": 60,
        }
    )
    chart.set_title({"name": heading(column, how), "name_font": {"size": 11}})
    chart.set_x_axis({"name": book.shown(day_unit(column, how)).text, "min": 0})
    chart.set_y_axis({"reverse": True})
    chart.set_legend({"none": True})
    return chart
