"""Batteries held against figures of others and of the trade."""

import numpy as np
import pytest

from sunbot.calendar import Lanes
from sunbot.demand.carriers import Asked, Demand
from sunbot.harvest.carriers import Supply
from sunbot.inputs.robot import Battery
from sunbot.storage import Designs, autonomy_h, balance, battery_voltages, pack_of, resistance_ohm

CELLS = {"lifepo4": 4, "li-ion": 3, "nimh": 5, "lead-acid": 6}


def battery(chemistry, **keys):
    return Battery(**({"chemistry": chemistry, "cells_in_series": CELLS[chemistry], "capacity_ah": 10.0} | keys))


def rest_v(pack, soc):
    return float(np.interp(soc, pack.curve.soc, pack.curve.rest_v))


def test_five_nickel_metal_hydride_cells_are_six_volts_and_seven_when_fresh():
    """Nominal 6 V over the middle of the charge, at least 7 V freshly charged."""
    # Common practice.
    pack = pack_of(battery("nimh"))
    assert rest_v(pack, 0.5) == pytest.approx(6.0, rel=0.05)
    assert rest_v(pack, 1.0) >= 7.0 - 1e-9


def test_a_pack_of_two_ampere_hours_carries_an_ampere_for_about_two_hours():
    """2.1 Ah of NiMH, new, at 25 °C, drawn at 6 W (1 A at 6 V)."""
    # Common practice; 10 %: the pack rests at 6.2 V and is cut at a tenth of its charge.
    hours = autonomy_h(pack_of(battery("nimh", capacity_ah=2.1), age="new"), battery_ah=2.1, draw_w=6.0)
    assert hours == pytest.approx(2.0, rel=0.10)


@pytest.mark.parametrize(
    ("chemistry", "soc", "cell_v"),
    [
        # Published: Safari & Delacourt, J. Electrochem. Soc. 158 (2011) A562, LFP on graphite.
        ("lifepo4", 0.0, 2.708),
        ("lifepo4", 0.5, 3.309),
        ("lifepo4", 0.9, 3.345),
        ("lifepo4", 1.0, 3.422),
        # Published: Chen et al., J. Electrochem. Soc. 167 (2020) 080534, NMC on graphite, window 3.0 to 4.2 V.
        ("li-ion", 0.0, 3.000),
        ("li-ion", 0.5, 3.767),
        ("li-ion", 0.9, 4.097),
        ("li-ion", 1.0, 4.200),
    ],
)
def test_rest_voltages_are_those_of_their_sources(chemistry, soc, cell_v):
    """The look-up in stored energy gives the published voltage and the charge back, to a millivolt a cell."""
    pack = pack_of(battery(chemistry))
    place = pack.curve.energy_at(soc) * pack.places_per_wh_ah
    assert float(pack.rest_v.at(np.asarray(place))) / CELLS[chemistry] == pytest.approx(cell_v, abs=0.001)
    assert float(pack.soc.at(np.asarray(place))) == pytest.approx(soc, abs=0.001)


def test_frost_takes_capacity_from_the_same_pack():
    """At -20 °C a lithium pack lasts about 0.55 of its warm hours, at 0 °C about 0.8."""
    # From memory: capacity 0.8 at 0 °C and 0.55 at -20 °C. 0.02: the cold locks charge at the low voltages.
    pack = pack_of(battery("lifepo4", cutoff_soc=0.0))
    warm, zero, cold = (autonomy_h(pack, battery_ah=10, draw_w=2.0, temp_c=temp_c) for temp_c in (25.0, 0.0, -20.0))
    assert zero / warm == pytest.approx(0.8, abs=0.02)
    assert cold / warm == pytest.approx(0.55, abs=0.02)


@pytest.mark.parametrize(("soc", "low_v", "high_v"), [(1.0, 12.6, 12.9), (0.5, 12.1, 12.3), (0.0, 11.4, 11.9)])
def test_a_twelve_volt_lead_acid_battery_rests_where_the_trade_says(soc, low_v, high_v):
    """Full 12.6-12.9 V, half 12.1-12.3 V, empty below 11.9 V."""
    # Common practice.
    assert low_v <= rest_v(pack_of(battery("lead-acid")), soc) <= high_v


def test_voltage_of_a_four_cell_pack_is_flat_over_most_of_its_charge():
    """Four LFP cells move by under 0.4 V between 20 and 90 %: thresholds by voltage mean little on them."""
    # Common practice.
    pack = pack_of(battery("lifepo4"))
    assert rest_v(pack, 0.9) - rest_v(pack, 0.2) < 0.4
    assert battery_voltages(pack, n=2) == pytest.approx([10.832, 13.688])


@pytest.mark.parametrize(
    ("chemistry", "mohm"), [("lifepo4", 5.0), ("li-ion", 5.0), ("nimh", 10.0), ("lead-acid", 3.33)]
)
def test_a_cell_of_twelve_ampere_hours_has_the_resistance_of_the_trade(chemistry, mohm):
    """Milliohms of one new cell at 25 °C where no data sheet is at hand."""
    # Common practice.
    pack = pack_of(battery(chemistry, cells_in_series=1), age="new")
    assert 1e3 * resistance_ohm(pack, 12.0) == pytest.approx(mohm, rel=2e-3)


@pytest.mark.parametrize(
    ("chemistry", "low", "high"),
    [("lifepo4", 0.94, 0.99), ("li-ion", 0.93, 0.99), ("nimh", 0.65, 0.85), ("lead-acid", 0.75, 0.90)],
)
def test_energy_out_over_energy_in_of_daily_cycles_lies_where_measurements_lie(chemistry, low, high):
    """Thirty days of 8 h charging and a night's load of a fifth of the capacity, at 25 °C."""
    # Common practice: lithium 0.94-0.98, lead-acid 0.75-0.85 (0.90 below the gassing charge), NiMH 0.65-0.85.
    pack = pack_of(battery(chemistry, start_soc=1.0), age="new")
    nominal_v = rest_v(pack, 0.5)
    hour = np.arange(24 * 30) % 24
    load = np.where(hour < 16, 10.0 * nominal_v * 0.2 / 16, 0.0)[:, None]
    offer = np.where(hour >= 16, 10.0 * nominal_v * 0.2 / 8 * 1.6, 0.0)
    zero = np.zeros_like(load)
    n, one = hour.size, np.ones(1)
    asked = Asked(load, load, zero, zero, zero)
    none = Asked(*(np.zeros((n, 0, 1)) for _ in range(5)))
    lanes = Lanes(np.arange(n)[:, None], np.ones((n, 1)), np.ones(n, dtype=np.int64), -np.ones(1, dtype=np.int64), 1)
    offer_w = offer[:, None, None]
    ledger = balance(
        Supply(np.zeros(1), one, offer_w, offer_w, 0 * offer_w, 0.0),
        Demand(np.zeros(1), asked, none, np.zeros(0), ()),
        pack,
        lanes,
        Designs(np.zeros(1, dtype=np.int64), 10 * one, one, one, np.ones((12, 0, 1)), 0 * one),
        air_temp_c=np.full(n, 25.0),
        row=np.arange(n),
        keep="months",
    ).ledger
    taken = ledger.panel - ledger.spilled
    out = ledger.loads + ledger.stored
    assert low <= float(out[0, 0] / taken[0, 0]) <= high
