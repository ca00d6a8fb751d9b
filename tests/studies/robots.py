"""Invented robots and weather for the studies: small, cheap to run, different from each other."""

from dataclasses import replace

import pandas as pd

from sunbot.inputs.robot import Robot
from sunbot.inputs.site import Site
from sunbot.sky import weather_for

HILL = {
    "name": "Invented hill",
    "latitude": 46.0,
    "longitude": 9.0,
    "altitude_m": 500,
    "time_zone": "Europe/Zurich",
    "snow_days": 0,
    "climate": {
        "ghi_kwh_m2_day": [1.2, 2.0, 3.2, 4.3, 5.1, 5.8, 6.0, 5.2, 3.8, 2.4, 1.4, 1.0],
        "temp_min_c": [-2, -1, 2, 6, 10, 14, 16, 15, 12, 7, 2, -1],
        "temp_max_c": [5, 7, 12, 16, 20, 25, 27, 26, 22, 16, 9, 5],
        "wind_m_s": 2.0,
        "year_to_year": 0.15,
    },
}


def hill():
    return Site(**HILL)


def robot(*, watts=20.0, battery_ah=12.0, load_w=1.5, work_w=None, survival=0.8, **parts):
    """A fixed robot with one steady load, and drive work by day if ``work_w`` is given."""
    loads = [{"name": "computer", "rail": "logic", "watts": load_w}]
    if work_w is not None:
        loads.append(
            {"name": "drive", "rail": "motors", "watts": work_w, "hours": [[9, 15]], "on_fraction": 0.5}
            | {"skip_below_soc": 0.4}
        )
    body = {
        "name": "Invented sampler",
        "site": hill(),
        "heading": "fixed",
        "heading_deg": 180,
        "target": {"survival": survival},
        "panel": [
            {"name": "lid", "watts": watts, "vmp_v": 18.0, "imp_a": watts / 18, "voc_v": 21.9}
            | {"isc_a": watts / 16.7, "tilt_deg": 40, "azimuth_deg": 0, "mass_kg": watts / 12, "price": 30 + watts}
        ],
        "controller": {"kind": "mppt", "own_use_w": 0.05, "max_charge_a": 100.0, "max_input_v": 60.0},
        "battery": {"chemistry": "li-ion", "cells_in_series": 3, "capacity_ah": battery_ah, "boot_wh": 0.05}
        | {"mass_kg": battery_ah / 12, "price": 4 * battery_ah},
        "rail": [
            {"name": "logic", "kind": "step-down", "volts": 5.0, "idle_w": 0.02},
            {"name": "motors", "kind": "none"},
        ],
        "load": loads,
    }
    return Robot(**(body | parts))


def quick_weather(site, *, years, seed=1, every=6):
    """Generated years in steps of a few hours: what a study asks of them is the same, at a third of the cost."""
    fine = weather_for(site.model_copy(update={"weather": site.weather}), years=years, seed=seed)
    half = pd.Timedelta(hours=(every - 1) / 2).as_unit("s")
    values = fine.table.to_numpy().reshape(-1, every, fine.table.shape[1]).mean(axis=1)
    table = pd.DataFrame(values, index=(fine.times[::every] + half).as_unit("s"), columns=fine.table.columns)
    return replace(fine, table=table, step_h=float(every), row=fine.row[::every] // every, snow_covered=None)


def random_robot(rng, *, skippable=False, chemistries=("lifepo4", "li-ion")):
    """A robot drawn at random: chemistry, controller, mount, loads by day and night."""
    chemistry = str(rng.choice(chemistries))
    cells = {"lifepo4": 4, "li-ion": 3, "nimh": 10, "lead-acid": 6}[chemistry]
    load_w, start = float(rng.uniform(0.3, 3.0)), float(rng.integers(0, 18))
    loads = [
        {"name": "computer", "rail": "logic", "watts": load_w, "on_fraction": float(rng.uniform(0.4, 1.0))},
        {"name": "lamp", "rail": "motors", "watts": float(rng.uniform(0, 5)), "hours": [[start, start + 5]]},
    ]
    if skippable:
        loads.append(
            {"name": "drive", "rail": "motors", "watts": float(rng.uniform(5, 40)), "hours": [[9, 14]]}
            | {"on_fraction": float(rng.uniform(0.2, 0.8)), "skip_below_soc": float(rng.uniform(0.2, 0.7))}
        )
    battery = {"chemistry": chemistry, "cells_in_series": cells, "capacity_ah": float(rng.uniform(4, 40))}
    battery |= {"boot_wh": float(rng.choice([0.0, 0.2])), "off_draw_w": float(rng.choice([0.0, 0.02]))}
    battery |= {"box_rise_c": float(rng.uniform(0, 4)), "heater_w": float(rng.choice([0.0, 0.0, 2.0]))}
    kind = str(rng.choice(["mppt", "pwm", "direct"]))
    panel = {"name": "lid", "watts": float(rng.uniform(10, 60)), "vmp_v": 18.0, "voc_v": 21.9}
    panel |= {"tilt_deg": float(rng.uniform(0, 70)), "wire": {"length_m": float(rng.uniform(0, 2)), "area_mm2": 1.5}}
    return robot(
        panel=[panel],
        controller={"kind": kind, "own_use_w": float(rng.uniform(0, 0.1)), "start_up_w": float(rng.choice([0.0, 0.3]))},
        battery=battery,
        load=loads,
        survival=float(rng.choice([0.6, 0.8, 1.0])),
        heading_deg=float(rng.uniform(0, 360)),
    )
