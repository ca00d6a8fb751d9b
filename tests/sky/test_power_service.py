"""The open hourly service: asked on this machine only, of a server that answers as the service documents."""

from __future__ import annotations

import json
import threading
import time
from collections.abc import Callable, Iterator
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer
from pathlib import Path
from urllib.parse import parse_qs, urlparse

import numpy as np
import pandas as pd
import pytest

from sunbot.errors import InputError
from sunbot.sky import power_service, reading_for, weather_for

NAMES = {
    "ghi": "ALLSKY_SFC_SW_DWN",
    "dni": "ALLSKY_SFC_SW_DNI",
    "dhi": "ALLSKY_SFC_SW_DIFF",
    "temp_air": "T2M",
    "wind_speed": "WS10M",
}


class Service:
    """A server on 127.0.0.1; ``mood`` says how it answers next, ``asked`` what it was asked."""

    def __init__(self, table: pd.DataFrame) -> None:
        self.table = table.rename(columns=NAMES).fillna(-999.0)
        self.mood: list[str] = []
        self.asked: list[dict[str, str]] = []
        service = self

        class Handler(BaseHTTPRequestHandler):
            def do_GET(self) -> None:
                query = {name: values[0] for name, values in parse_qs(urlparse(self.path).query).items()}
                service.asked.append(query)
                status, body = service.answer(query, service.mood.pop(0) if service.mood else "well")
                self.send_response(status)
                self.send_header("Content-Type", "application/json")
                self.send_header("Content-Length", str(len(body)))
                self.end_headers()
                self.wfile.write(body)

            def log_message(self, *args: object) -> None:
                pass

        self.server = ThreadingHTTPServer(("127.0.0.1", 0), Handler)
        self.url = f"http://127.0.0.1:{self.server.server_port}/api/temporal/hourly/point"
        threading.Thread(target=self.server.serve_forever, args=(0.01,), daemon=True).start()

    def answer(self, query: dict[str, str], mood: str) -> tuple[int, bytes]:
        """Published: the hourly point service of NASA POWER answers GeoJSON, stamps and values by parameter."""
        if mood == "slow":
            time.sleep(1.0)
        if mood == "busy":
            return 503, b'{"messages": ["The service is busy."]}'
        if mood == "nonsense":
            return 200, b"<html>come back later</html>"
        first, last = pd.Timestamp(query["start"], tz="UTC"), pd.Timestamp(query["end"], tz="UTC")
        part = self.table.loc[first : last + pd.Timedelta("23h59min")]
        if mood == "short":
            part = part.iloc[:100]
        stamps = part.index.strftime("%Y%m%d%H")
        parameter = {
            name: dict(zip(stamps, part[name].tolist(), strict=True)) for name in query["parameters"].split(",")
        }
        document = {
            "type": "Feature",
            "geometry": {"type": "Point", "coordinates": [float(query["longitude"]), float(query["latitude"]), 612.3]},
            "properties": {"parameter": parameter},
            "header": {"title": "invented", "fill_value": -999.0, "time_standard": "UTC"},
            "messages": [],
            "parameters": {},
            "times": {"data": 0.1, "process": 0.1},
        }
        return 200, json.dumps(document).encode()


@pytest.fixture
def service(site_of, invented_record, monkeypatch) -> Iterator[Service]:
    table = invented_record(site_of(), "2011-01-01", "2013-01-01")
    made = Service(table.set_axis(table.index - pd.Timedelta("30min")))
    monkeypatch.setattr(power_service, "BASE_URL", made.url)
    monkeypatch.setattr(power_service, "PAUSE_S", 0.0)
    monkeypatch.setenv("NO_PROXY", "127.0.0.1")
    yield made
    made.server.shutdown()
    made.server.server_close()


@pytest.fixture
def ask(site_of) -> Callable[..., object]:
    def make(first: int = 2011, last: int = 2012, **keys):
        return site_of(source="nasa-power", file=None, first_year=first, last_year=last, **keys)

    return make


def test_two_years_are_fetched_once_and_kept(service, ask, invented_record, tmp_path):
    """A year a request with the documented parameters; the second run asks nothing and gives the same weather."""
    weather = weather_for(ask())
    assert [query["start"] for query in service.asked] == ["20110101", "20120101"]
    assert service.asked[0]["end"] == "20111231"
    assert service.asked[0]["time-standard"] == "utc"
    assert set(service.asked[0]["parameters"].split(",")) == set(NAMES.values())
    assert float(service.asked[0]["latitude"]) == 47.3
    assert weather.n_years == 2
    assert len(weather.table) == (365 + 366) * 24
    kept = tmp_path / "nasa-power_47.3000_8.1000_2011-2012.csv"
    assert kept.read_text().startswith("time,ghi,dni,dhi,temp_air,wind_speed\n2011-01-01T00:00:00Z,")
    service.server.shutdown()
    again = weather_for(ask())
    assert again.digest == weather.digest
    assert len(service.asked) == 2
    assert [path.name for path in Path(tmp_path).iterdir()] == [kept.name]


def test_stamps_name_the_start_of_the_hour(service, ask, invented_record):
    """The hours that come back are those that were served, at their middles."""
    table = reading_for(ask()).table
    want = invented_record(ask(), "2011-01-01", "2013-01-01")
    pd.testing.assert_frame_equal(table, want, check_freq=False)


def test_missing_values_are_gaps(service, ask):
    """-999 is no light: three missing hours are filled and said."""
    service.table.iloc[4000:4003, :3] = -999.0
    weather = weather_for(ask())
    assert weather.table["ghi"].min() >= 0.0
    assert "gaps-filled" in {caution.code for caution in weather.cautions}


def test_a_year_with_a_hole_is_dropped(service, ask):
    """A fortnight of -999 costs its year and no other."""
    service.table.iloc[10000:10400, :3] = -999.0
    weather = weather_for(ask())
    assert weather.n_years == 1
    assert "years-dropped" in {caution.code for caution in weather.cautions}


@pytest.mark.parametrize("mood", ["busy", "nonsense", "short"])
def test_one_bad_answer_is_asked_again(service, ask, mood):
    """One retry: a service that was busy for a moment is no reason to fail."""
    service.mood = [mood]
    assert weather_for(ask(2011, 2011)).n_years == 1
    assert len(service.asked) == 2


@pytest.mark.parametrize(
    ("mood", "message"),
    [("busy", "it refused: .*busy"), ("nonsense", "its answer cannot be read"), ("short", "100 of 8760 hours")],
)
def test_two_bad_answers_are_an_error_and_leave_no_file(service, ask, tmp_path, mood, message):
    """The message says what the service said and what needs no network."""
    service.mood = [mood, mood]
    with pytest.raises(InputError, match=message) as caught:
        weather_for(ask(2011, 2011))
    assert 'source = "climate"' in str(caught.value)
    assert not list(tmp_path.iterdir())


def test_a_silent_service_is_given_up(service, ask, monkeypatch):
    """The time-out holds although the reader itself has none."""
    monkeypatch.setattr(power_service, "TIMEOUT_S", 0.1)
    service.mood = ["slow", "slow"]
    start = time.monotonic()
    with pytest.raises(InputError, match=r"no answer within 0\.1 s"):
        weather_for(ask(2011, 2011))
    assert time.monotonic() - start < 0.9


def test_no_network_is_said_plainly(ask, monkeypatch):
    """A port nobody listens on: it cannot be reached."""
    monkeypatch.setattr(power_service, "BASE_URL", "http://127.0.0.1:9/none")
    monkeypatch.setattr(power_service, "PAUSE_S", 0.0)
    monkeypatch.setenv("NO_PROXY", "127.0.0.1")
    with pytest.raises(InputError, match="it cannot be reached"):
        weather_for(ask(2011, 2011))


def test_a_spoilt_copy_says_to_delete_it(service, ask, tmp_path):
    """A kept copy that cannot be read names the file and the remedy."""
    weather_for(ask(2011, 2011))
    kept = next(tmp_path.glob("nasa-power*.csv"))
    kept.write_text("time,ghi\nsoon,1\n")
    with pytest.raises(InputError, match="delete the file"):
        weather_for(ask(2011, 2011))


@pytest.mark.parametrize(("first", "last"), [(1999, 2005), (2011, 2199)])
def test_years_the_service_does_not_have_are_refused(ask, first, last):
    """Before 2001 and in the future there is nothing to ask for."""
    with pytest.raises(InputError, match="is not within 2001 to"):
        weather_for(ask(first, last))


def test_nothing_is_asked_unless_the_site_names_the_service(service, site_of):
    """A clear-sky year asks no network."""
    weather = weather_for(site_of(source="clear-sky", file=None))
    assert np.isfinite(weather.table.to_numpy()).all()
    assert service.asked == []
