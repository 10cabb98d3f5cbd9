"""The reference tables are what photon tracing gives: some cases traced anew with fewer photons."""

from __future__ import annotations

import pytest

from tests.build_stand_reference import closed_cases, row_cases
from tests.photons import inclination_table, mean_projection, trace, travel
from tests.standcase import reference

PHOTONS = 40_000


def test_tables_hold_the_cases_of_their_script() -> None:
    for name, cases in (("stand_closed.csv", closed_cases()), ("stand_rows.csv", row_cases())):
        stored, _ = reference(name)
        assert [tuple(case.values())[:11] for case in stored] == [tuple(map(float, case)) for case in cases]


@pytest.mark.parametrize(("name", "at"), [("stand_closed.csv", 170), ("stand_rows.csv", 206)])
def test_some_cases_traced_anew(name: str, at: int) -> None:
    """40,000 photons: standard deviation of a share at most .0025, five of them allowed."""
    cases, truth = reference(name)
    case = cases[at]
    found = trace(
        inclination_table(case["chi"]),
        mean_projection(case["chi"]),
        case["lai"],
        (case["width"], case["spacing"], case["height"]),
        case["reflect"],
        case["transmit"],
        case["floor"],
        travel(case["zenith"], case["across"]),
        bool(case["diffuse"]),
        PHOTONS,
        1,
    )
    assert found == pytest.approx(truth[at], abs=0.0125)
    assert sum(found[:3]) == pytest.approx(1.0, abs=0.01)  # roulette keeps energy on average
