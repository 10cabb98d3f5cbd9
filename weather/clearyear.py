"""A year without a file: clear sky every day as the upper bound of light, and zonal-mean air."""

from __future__ import annotations

from typing import Final

import numpy as np

from weather.raw import RawWeather
from weather.record import Finding, Floats, Site, Times
from weather.site import solar_time
from weather.typical import nominal_hours

# North & Coakley (1979), J. Atmos. Sci. 36:1189: Legendre amplitudes of the zonal-mean surface temperature
# (constants from memory)
MEAN_C: Final = 14.9
SEASON_K: Final = -15.5  # first mode, times sin(latitude)
POLE_K: Final = -28.0  # second mode
LAG_DAYS: Final = 30.0  # the coldest day comes this long after the solstice
LAPSE_K_M: Final = 0.0065  # standard atmosphere
DAILY_K: Final = 5.0  # half the daily range: common practice for mid-latitude land
WARMEST_H: Final = 15.0  # solar time of the daily maximum: common practice


def zonal_temperature(latitude: float, elevation: float, utc: Times, longitude: float) -> Floats:
    """Air temperature of the latitude's mean climate, degC, (N,): year's wave, height, and a daily wave."""
    x = np.sin(np.radians(latitude))
    days = utc.astype("datetime64[D]")
    day = (days - days.astype("datetime64[Y]").astype("datetime64[D]")).astype(float)
    season = np.cos(2.0 * np.pi * (day + 10.0 - LAG_DAYS) / 365.0)  # +1 a month after the December solstice
    mean = MEAN_C + POLE_K * 0.5 * (3.0 * x**2 - 1.0) + SEASON_K * x * season
    daily = DAILY_K * np.cos(2.0 * np.pi * (solar_time(utc, longitude) - WARMEST_H) / 24.0)
    return np.asarray(mean + daily - LAPSE_K_M * elevation)


def clear_year(site: Site, utc_offset_h: float) -> RawWeather:
    """Return the nominal year with zonal-mean temperature; the caller puts the clear sky in as radiation."""
    time = nominal_hours()
    utc = time + np.timedelta64(round(1800.0 - 3600.0 * utc_offset_h), "s")
    temp = zonal_temperature(site.latitude, site.elevation, utc, site.longitude)
    findings = (
        Finding(
            "clear-sky",
            "warning",
            "no weather file: clear sky all year, an UPPER BOUND of light, never an expectation",
        ),
        Finding(
            "clear-sky-air",
            "warning",
            "air temperature is the mean of the latitude (North & Coakley 1979) with a daily wave of 5 K: "
            "heat figures are an order of magnitude and no basis for sizing",
        ),
    )
    return RawWeather(
        title=f"Clear-sky year at {site.latitude:.2f}, {site.longitude:.2f}",
        source="computed: Ineichen & Perez (2002) clear sky with the turbidity maps that pvlib ships",
        format="clear sky",
        latitude=site.latitude,
        longitude=site.longitude,
        elevation=site.elevation,
        utc_offset_h=utc_offset_h,
        timezone=site.timezone,
        stamp=time,
        step_s=3600.0,
        label="start",
        typical=True,
        columns={"temp_air": temp},
        rows_lost=0,
        findings=findings,
    )
