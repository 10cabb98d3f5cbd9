"""Damaged files: every reader ends in one message or a right reading, and lost rows are said."""

from pathlib import Path

import numpy as np
import pandas as pd
import pvlib
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from tests.weather_opendata import pvlib_samples
from weather.errors import UserError
from weather.files import read_file
from weather.load import load_weather
from weather.raw import RawWeather
from weather.request import WeatherRequest

PVLIB_DATA = Path(pvlib.__file__).parent / "data"
ROWS = 24 * 12
LIMIT = settings(
    deadline=None,
    max_examples=40,
    suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow],
)
Damage = list[tuple[str, float, int]]
damage = st.lists(
    st.tuples(st.sampled_from(["flip", "drop", "add", "cut", "swap"]), st.floats(0, 1), st.integers(0, 255)),
    min_size=1,
    max_size=6,
)


def damaged(data: bytes, how: Damage) -> bytes:
    """Return the bytes after flips, losses, insertions, a cut or an exchange of two blocks."""
    result = bytearray(data)
    for kind, where, value in how:
        k = min(int(where * len(result)), max(len(result) - 1, 0))
        if kind == "flip" and result:
            result[k] = value
        elif kind == "drop":
            del result[k : k + 1 + value % 5]
        elif kind == "add":
            result[k:k] = bytes([value]) * (1 + value % 3)
        elif kind == "cut" and value > 200:
            del result[k:]
        elif kind == "swap":
            result[k : k + 40] = result[k + 40 : k + 80] + result[k : k + 40]
    return bytes(result)


def shortened(data: bytes, head: int) -> bytes:
    """Return header and the first days of a text file, so that many damages can be tried."""
    return b"\n".join(data.replace(b"\r\n", b"\n").split(b"\n")[: head + ROWS]) + b"\n"


def samples(request: pytest.FixtureRequest) -> dict[str, bytes]:
    folder = pvlib_samples(request.config.cache)
    index = pd.date_range("2021-06-01", periods=ROWS, freq="1h")
    hour = np.arange(ROWS) % 24
    light = np.maximum(0.0, 500.0 * np.sin(2 * np.pi * (hour - 6) / 24)).round(1)
    own = pd.DataFrame(
        {"ghi": light, "temp_air": 10.0 + hour / 10, "rh": 60.0, "wind": 2.0 + hour / 24}, index
    )
    own.index.name = "time"
    json_text = (folder / "tmy_45.000_8.000_2005_2023.json").read_text()
    cut = json_text.index('{"time(UTC)": "20180113:0000"')
    return {
        "tmy3": shortened((PVLIB_DATA / "723170TYA.CSV").read_bytes(), 2),
        "tmy2": shortened((PVLIB_DATA / "12839.tm2").read_bytes(), 1),
        "epw": shortened((folder / "NLD_Amsterdam062400_IWEC.epw").read_bytes(), 8),
        "pvgis": shortened((folder / "tmy_45.000_8.000_2005_2023.csv").read_bytes(), 18),
        "json": (json_text[:cut].rstrip().rstrip(",") + "]}}").encode(),
        "psm": shortened((folder / "test_read_psm3.csv").read_bytes(), 3),
        "logger": own.to_csv().encode(),
        "semicolon": own.to_csv(sep=";", decimal=",").encode(),
        "parquet": own.reset_index().to_parquet(),
    }


@pytest.fixture(scope="module")
def files(request: pytest.FixtureRequest) -> dict[str, bytes]:
    return samples(request)


KINDS = ["tmy3", "tmy2", "epw", "pvgis", "json", "psm", "logger", "semicolon", "parquet"]
pytestmark = pytest.mark.registry


def rows_in(data: bytes, header: int) -> int:
    return sum(
        1 for line in data.replace(b"\r\n", b"\n").replace(b"\r", b"\n").split(b"\n")[header:] if line.strip()
    )


def request_for(path: Path) -> WeatherRequest:
    """The study names the place, as it must for a plain record; a file's own place is only warned of."""
    return WeatherRequest(file=path, latitude=45.0, longitude=8.0, elevation=200.0, timezone="Europe/Rome")


@pytest.mark.parametrize("kind", KINDS)
def test_undamaged_samples_read(files: dict[str, bytes], kind: str, tmp_path: Path) -> None:
    path = tmp_path / f"sample.{kind}"
    path.write_bytes(files[kind])
    raw = read_file(path)
    assert raw.rows_lost == 0
    assert len(raw.stamp) == ROWS


@pytest.mark.parametrize("kind", KINDS)
@LIMIT
@given(how=damage)
def test_damage_ends_in_a_message_or_a_reading(
    files: dict[str, bytes], kind: str, how: Damage, tmp_path: Path
) -> None:
    path = tmp_path / f"damaged.{kind}"
    path.write_bytes(damaged(files[kind], how))
    try:
        raw = read_file(path)
    except UserError as error:
        message = str(error)
        assert "\n" not in message
        assert len(message) < 900
        return
    told = sum(item.count for item in raw.findings if item.check == "rows-lost")
    assert told == raw.rows_lost
    check_rows(path, kind, raw)
    try:  # and through the whole chain
        weather = load_weather(request_for(path))
    except UserError:
        return
    for name in ("ghi", "dni", "dhi", "temp_air", "longwave_down", "wind_speed", "pressure"):
        assert np.isfinite(getattr(weather, name)).all(), name
    beam = weather.dni * np.maximum(np.cos(np.radians(weather.zenith)), 0.0)
    assert np.abs(weather.ghi - weather.dhi - beam).max() < 1e-6


def check_rows(path: Path, kind: str, raw: RawWeather) -> None:
    """Every non-empty line after the header is either read or counted as lost."""
    header = {"tmy3": 2, "tmy2": 1, "psm": 3}.get(kind)
    if header is None or raw.format == "logger":
        return
    assert len(raw.stamp) + raw.rows_lost == rows_in(path.read_bytes(), header)


@LIMIT
@given(content=st.binary(max_size=400))
def test_any_bytes_end_in_a_message(content: bytes, tmp_path: Path) -> None:
    path = tmp_path / "any.csv"
    path.write_bytes(content)
    with pytest.raises(UserError):
        load_weather(request_for(path))


@pytest.mark.parametrize(
    "content",
    [
        b"\xff\xfeL\x00O",
        b"PAR1" + b"\x00" * 40 + b"PAR1",
        b"time,temp_air\n" + b"2021-01-01 00:00,1e999\n" * 30,
        b"time,temp_air,ghi\n2021-01-01 00:00,1,0\n2999999-01-01,2,3\n",
    ],
)
def test_known_traps_end_in_a_message(content: bytes, tmp_path: Path) -> None:
    path = tmp_path / "trap.csv"
    path.write_bytes(content)
    with pytest.raises(UserError):
        load_weather(request_for(path))


@LIMIT
@given(
    values=st.lists(
        st.sampled_from(
            ["", "nan", "inf", "-inf", "1e309", "x", "5", "-9999", "1,5", '"7"', "٣", "1_0", "0x1F"]
        ),
        min_size=ROWS,
        max_size=ROWS,
    )
)
def test_odd_numbers_are_gaps_not_values(values: list[str], tmp_path: Path) -> None:
    rows = [
        f"2021-06-{1 + k // 24:02d} {k % 24:02d}:00,{12 + k % 24},{value}" for k, value in enumerate(values)
    ]
    path = tmp_path / "odd.csv"
    path.write_text("time,temp_air,wind\n" + "\n".join(rows), encoding="utf-8")
    raw = read_file(path)
    wind = raw.columns["wind_speed"]
    known = wind[np.isfinite(wind)]
    assert set(known.tolist()) <= {5.0, 7.0}
    assert raw.rows_lost == values.count("1,5")  # a field too many
