"""The steps behind an answer as CSV: columns, order, and the energy of the document in them."""

from __future__ import annotations

from dataclasses import replace

import pandas as pd
import pytest

from sunbot.report.tables import trace_table, weather_table, write_table

# The design's own list, in this order.
COLUMNS = "time,ghi_w_m2,plane_w_m2,cell_temp_c,harvest_w,spilled_w,demand_w,served_w,soc,box_temp_c,on"


@pytest.fixture(scope="module")
def steps(dies, tmp_path_factory):
    """What stands in the file, read back as anyone would."""
    path = tmp_path_factory.mktemp("steps") / "steps.csv"
    write_table(trace_table(dies), path)
    return path


def test_the_columns_are_the_agreed_ones(steps):
    """Exactly, and in this order."""
    assert steps.read_text().splitlines()[0] == COLUMNS


def test_every_step_stands_once_in_the_order_of_time(steps, dies):
    """All steps of all years, chronological although energy years start in summer, stamps in UTC."""
    table = pd.read_csv(steps)
    assert len(table) == len(dies.weather.table)
    assert table["time"].str.endswith("Z").all()
    assert table["time"].is_monotonic_increasing
    assert table["time"].is_unique
    assert table["time"].tolist() == dies.weather.times.strftime("%Y-%m-%dT%H:%M:%SZ").tolist()
    assert table["ghi_w_m2"].to_numpy() == pytest.approx(dies.weather.table["ghi"].to_numpy(), rel=1e-5)


def test_the_sums_are_those_of_the_months(steps, dies):
    """Harvest, spilled and demand add up to the document's months, unserved to what was asked less what was served."""
    table = pd.read_csv(steps)
    hours = dies.weather.step_h
    days = {1: 31, 2: 28, 3: 31, 4: 30, 5: 31, 6: 30, 7: 31, 8: 31, 9: 30, 10: 31, 11: 30, 12: 31}
    for column, word in (
        ("harvest_w", "harvest_wh_day"),
        ("spilled_w", "spilled_wh_day"),
        ("demand_w", "demand_wh_day"),
    ):
        told = sum(dies.months.loc[month, word] * n for month, n in days.items())
        # six digits are written
        assert table[column].sum() * hours / 3.0 == pytest.approx(told, rel=1e-5), column
    missed = sum(
        (dies.months.loc[month, "unserved_wh_day"] + dies.months.loc[month, "skipped_wh_day"]) * n
        for month, n in days.items()
    )
    served = (table["demand_w"] - table["served_w"]).sum() * hours / 3.0
    assert served == pytest.approx(missed, rel=1e-4)


def test_charge_and_state_stay_within_what_they_can_be(steps):
    """Shares from 0 to 1, no negative power, harvest only where there is light."""
    table = pd.read_csv(steps)
    assert table["soc"].between(0.0, 1.0).all()
    assert table["on"].between(0.0, 1.0).all()
    powers = ["ghi_w_m2", "plane_w_m2", "harvest_w", "spilled_w", "demand_w", "served_w"]
    assert (table[powers] >= 0.0).all().all()
    assert (table.loc[table["plane_w_m2"] == 0.0, "harvest_w"] == 0.0).all()
    assert (table["spilled_w"] <= table["harvest_w"] + 1e-4).all()


def test_steps_that_were_not_kept_are_asked_for(dies):
    """The message names the argument."""
    with pytest.raises(ValueError, match="trace=True"):
        trace_table(replace(dies, trace=None))


def test_the_weather_table_is_the_weather(dies):
    """One row a step, the columns of the weather behind the time."""
    table = weather_table(dies.weather)
    assert list(table.columns) == ["time", "ghi", "dni", "dhi", "temp_air", "wind_speed"]
    assert table.iloc[:, 1:].to_numpy() == pytest.approx(dies.weather.table.to_numpy())
