"""The usual cautions of heating and covering, in one place for page, workbook and terminal."""

from __future__ import annotations

from typing import Final

CAUTIONS: Final[tuple[str, ...]] = (
    "Heating sizes here are a planning figure. Local codes and standards come first; have the plant "
    "designed and signed by someone licensed for it, with margins for burner, pipes, an ageing house and "
    "a colder year.",
    "A typical weather year is put together from ordinary months: its extremes are removed. A peak from "
    "it is no sizing peak; compare the design night and, where you have them, ten or more years of "
    "record.",
    "Snow: a better insulated roof, a drawn screen or a house kept frost-free only melts less snow. Keep "
    "the structure's design snow load, open the screens in snow so that heat reaches the roof, and heat "
    "in time; size for the open screen where snow must be melted.",
    "A screen can jam, tear or stand open: the load with screens open stands beside the load with them "
    "drawn.",
    "Failure of power or burner on a cold night costs the crop within hours: plan a second burner or "
    "boiler, back-up power for pumps, burners and the fans of an inflated film, an alarm, and fuel in "
    "store.",
    "Combustion: a tight house starves a flame. Burners need outside combustion air and a flue; unvented "
    "heaters and exhaust used for CO2 give carbon monoxide, nitrogen oxides and ethylene: use approved "
    "equipment with CO and CO2 alarms.",
    "Hot pipes and tanks: water above 60 °C scalds and heated water expands; relief valves and expansion "
    "vessels belong to licensed design. A heat store's foundation carries a tonne per cubic metre.",
    "A smallest boiler with a heat store assumes that every coming hour is known. Real control does not "
    "know: an operating reserve is added on top, and the size without a store remains the safe figure.",
)
