"""The starter study's commented supply tables are valid once the comment signs are gone."""

from __future__ import annotations

import tomllib
from importlib.resources import files

from canopy.study import HeatingKeys


def test_commented_tables_can_be_used() -> None:
    text = files("reports").joinpath("studies/starter.toml").read_text(encoding="utf-8")
    part = text[text.index("[heating]") : text.index("[[screen]]")]
    lines = [line.removeprefix("# ") for line in part.splitlines()]
    table = tomllib.loads("\n".join(lines))["heating"]
    assert {"tariff", "heat_pump", "heat_pump_tariff", "store"} <= table.keys()
    del table["price_per_kwh"]  # excludes the tariff
    keys = HeatingKeys.model_validate(table)
    assert keys.tariff is not None
    assert keys.tariff.contract_kw == 900.0
    assert keys.store is not None
    assert keys.store.volumes_m3_per_1000_m2[-1] == 200.0
