"""Small invented worlds: a few short years of light, cold and loads, with everything the balance knows in them."""

from dataclasses import dataclass, replace

import numpy as np

from sunbot.calendar import Lanes
from sunbot.demand.carriers import Asked, Demand
from sunbot.harvest.carriers import Supply
from sunbot.inputs.robot import Battery
from sunbot.storage import Designs, balance, battery_voltages, pack_of

CHEMISTRIES = ("lifepo4", "li-ion", "nimh", "lead-acid")
CELLS = {"lifepo4": 4, "li-ion": 3, "nimh": 5, "lead-acid": 6}


@dataclass
class World:
    """Everything one call of the balance takes."""

    battery: Battery
    age: str
    supply: Supply
    demand: Demand
    lanes: Lanes
    designs: Designs
    air_c: np.ndarray
    row: np.ndarray

    def run(self, keep="months"):
        pack = pack_of(self.battery, age=self.age)
        return balance(
            self.supply,
            self.demand,
            pack,
            self.lanes,
            self.designs,
            air_temp_c=self.air_c,
            row=self.row,
            keep=keep,
        )


def lanes_of(n_years, days_a_month, *, step_h=1.0, ring=True, short_year=None, first_month=1):
    """Years of twelve short months on one time axis; one of them may miss the last day of its second month."""
    per_day = round(24 / step_h)
    months = (np.arange(12) + first_month - 1) % 12 + 1
    month = np.repeat(months, days_a_month * per_day)
    n = month.size
    step = np.full((n, n_years), step_h)
    row = np.zeros((n, n_years), dtype=np.int64)
    at = 0
    for y in range(n_years):
        if y == short_year:
            gap = slice(2 * days_a_month * per_day - per_day, 2 * days_a_month * per_day)
            step[gap, y] = 0.0
        real = step[:, y] > 0
        row[real, y] = at + np.arange(real.sum())
        at += real.sum()
    before = (np.arange(n_years) - 1) % n_years if ring else np.full(n_years, -1)
    return Lanes(row, step, month, before, first_month), at


def split(total, rng):
    """Asked power divided into loads, rails, wire and idle."""
    shares = rng.dirichlet([6, 1, 1, 1])
    loads, rails, wire = (total * share for share in shares[:3])
    return Asked(loads + rails + wire + total * shares[3], loads, rails, wire, total * shares[3])


def random_world(seed, *, n_years=2, days=2, n_designs=3, **force):
    """A world in which the robot is sometimes full, sometimes cut; ``force`` fixes some of its random choices."""
    rng = np.random.default_rng(seed)

    def choose(name, options):
        pick = options[rng.integers(len(options))]
        return force.get(name, pick)

    chemistry = choose("chemistry", CHEMISTRIES)
    explicit = choose("explicit", (False, True))
    battery = Battery(
        chemistry=chemistry,
        cells_in_series=CELLS[chemistry],
        capacity_ah=float(rng.uniform(2, 12)),
        start_soc=float(choose("start_soc", (1.0, 0.9))),
        boot_wh=float(choose("boot_wh", (0.0, 0.3))),
        off_draw_w=float(choose("off_draw_w", (0.0, 0.2, 1.5))),
        heater_w=float(choose("heater_w", (0.0, 0.0, 1.0))),
        box_lag_h=float(choose("box_lag_h", (0.0, 2.0, 7.5))),
        box_rise_c=float(choose("box_rise_c", (0.0, 3.0))),
        **(
            {
                "cutoff_soc": 0.15,
                "restart_soc": 0.3,
                "resistance_mohm": float(rng.uniform(20, 800) * rng.choice([1, 1, 5])),
                "max_charge_c": float(rng.uniform(0.1, 0.8)),
                "charge_efficiency": float(rng.uniform(0.8, 1.0)),
                "self_discharge_pct_month": float(rng.uniform(0, 30)),
                "charge_min_c": -5.0,
                "charge_max_c": 30.0,
            }
            if explicit
            else {}
        ),
    )
    step_h = choose("step_h", (1.0, 1.0, 0.5))
    ring = choose("ring", (True, True, True, False))
    short = choose("short_year", (None, 1))
    lanes, n_times = lanes_of(
        n_years, days, step_h=step_h, ring=ring, short_year=short, first_month=int(rng.integers(1, 13))
    )
    hour = (np.arange(n_times) * step_h) % 24
    season = np.cos(2 * np.pi * np.arange(n_times) / n_times * n_years)
    air = 8 - force.get("swing_c", 14) * season + 5 * np.sin(2 * np.pi * (hour - 9) / 24) + rng.normal(0, 2, n_times)
    volts = battery_voltages(pack_of(battery), n=5)
    supply_v = volts if choose("supply_volts", (False, True)) else volts[:1]
    demand_v = volts if choose("demand_volts", (False, True)) else volts[:1]

    sun = np.maximum(0, np.sin(np.pi * (hour - 6) / 12)) * (1.0 - 0.6 * season) * rng.uniform(0.05, 1.0, n_times)
    watts = np.array([8.0, 15.0, 40.0])
    nodes = np.linspace(1.0, 0.8, supply_v.size)
    panel = sun[:, None, None] * watts[:, None] * nodes
    wire = 0.03 * panel
    offer = 0.93 * (panel - wire)
    supply = Supply(supply_v, watts, offer, panel, wire, own_use_w=float(choose("own_use_w", (0.05, 0.0))))

    n_rows = min(n_times, 24 * days)
    row = np.arange(n_times) % n_rows
    at_volts = np.linspace(1.0, 1.3, demand_v.size)
    ease = float(choose("ease", (0.1, 0.25, 0.4, 1.0)))
    base = ease * rng.uniform(0.5, 3.0, n_rows)
    n_levels = choose("n_levels", (0, 1, 3))
    due = rng.random((n_rows, n_levels, 1)) < 0.3
    work = ease * due * rng.uniform(1, 12, (1, n_levels, 1)) * at_volts
    skip = np.sort(rng.uniform(0.2, 0.7, n_levels))
    demand = Demand(
        demand_v,
        split(base[:, None] * at_volts, rng),
        split(work, rng),
        skip,
        tuple(f"work {k}" for k in range(n_levels)),
    )
    designs = Designs(
        watts_at=rng.integers(0, 3, n_designs) if n_designs > 1 else np.array([2]),
        battery_ah=rng.uniform(2, 15, n_designs),
        light_x=rng.uniform(0.7, 1.2, n_designs),
        essential_x=rng.uniform(0.5, 1.5, n_designs),
        work_x=rng.uniform(0, 1.5, (12, n_levels, n_designs)),
        extra_w=rng.uniform(0, 0.5, n_designs),
    )
    age = choose("age", ("worn", "new"))
    # At 1 W the first warms by all that the cold of these worlds asks for, the last by 4 K at most.
    battery = battery.model_copy(update={"box_loss_w_per_k": choose("box_loss", (None, 0.03, 0.25))})
    return World(battery, age, supply, demand, lanes, designs, air, row)


def one_design(world, d):
    """The same world with one of its designs."""
    x = world.designs
    at = slice(d, d + 1)
    few = Designs(x.watts_at[at], x.battery_ah[at], x.light_x[at], x.essential_x[at], x.work_x[..., at], x.extra_w[at])
    return replace(world, designs=few)


def scalar_case(scalar_loop, world, d):
    """One design of a world in the plain numbers of the scalar loop."""
    x, supply, demand, lanes = world.designs, world.supply, world.demand, world.lanes
    w = int(x.watts_at[d])
    parts = ("loads_w", "rails_w", "wire_w", "idle_w")
    essential = np.stack([getattr(demand.essential, p) for p in parts], axis=-1)
    work = np.stack([getattr(demand.work, p) for p in parts], axis=-1)
    return scalar_loop.Case(
        battery=world.battery,
        worn=world.age == "worn",
        capacity_ah=float(x.battery_ah[d]),
        step_h=float(lanes.step_h.max()),
        air_c=world.air_c.tolist(),
        hours=lanes.step_h.T.tolist(),
        row=lanes.row.T.tolist(),
        month=lanes.month.tolist(),
        before=lanes.before.tolist(),
        demand_row=world.row.tolist(),
        supply_v=supply.battery_v.tolist(),
        offer=supply.offer_w[:, w].tolist(),
        panel=supply.panel_w[:, w].tolist(),
        wire=supply.wire_w[:, w].tolist(),
        own_use_w=supply.own_use_w,
        demand_v=demand.battery_v.tolist(),
        essential=essential.tolist(),
        work=work.tolist(),
        skip_soc=demand.skip_below_soc.tolist(),
        work_x=x.work_x[:, :, d].tolist(),
        light_x=float(x.light_x[d]),
        essential_x=float(x.essential_x[d]),
        extra_w=float(x.extra_w[d]),
    )


def plain_world(battery, *, offer_w, load_w, temp_c=25.0, step_h=1.0, work_w=None, skip=0.5, ring=False, age="new"):
    """One lane through given harvest and load [W], by step or constant; no own use, one voltage, January throughout."""
    n = max(np.size(offer_w), np.size(load_w), np.size(temp_c))
    offer, load, air = (np.broadcast_to(np.asarray(x, dtype=float), n) for x in (offer_w, load_w, temp_c))
    zero = np.zeros((n, 1))
    work = np.zeros((n, 0, 1)) if work_w is None else np.broadcast_to(np.asarray(work_w, float), n)[:, None, None]
    offer3 = offer[:, None, None]
    demand = Demand(
        np.zeros(1),
        Asked(load[:, None], load[:, None], zero, zero, zero),
        Asked(work, work, 0 * work, 0 * work, 0 * work),
        np.full(work.shape[1], skip),
        ("work",) * work.shape[1],
    )
    steps = np.arange(n)[:, None]
    month = np.ones(n, dtype=np.int64)
    lanes = Lanes(steps, np.full((n, 1), step_h), month, np.array([0 if ring else -1]), 1)
    one = np.ones(1)
    designs = Designs(
        np.zeros(1, dtype=np.int64), one * battery.capacity_ah, one, one, np.ones((12, work.shape[1], 1)), np.zeros(1)
    )
    supply = Supply(np.zeros(1), one, offer3, offer3, 0 * offer3, 0.0)
    return World(battery, age, supply, demand, lanes, designs, air, np.arange(n))


def ideal(chemistry, **keys):
    """A battery that loses nothing and takes any current, but for what ``keys`` say."""
    lossless = {
        "resistance_mohm": 1e-9,
        "charge_efficiency": 1.0,
        "self_discharge_pct_month": 0.0,
        "max_charge_c": 100.0,
        "cutoff_soc": 0.05,
        "capacity_ah": 10.0,
    }
    return Battery(chemistry=chemistry, cells_in_series=CELLS[chemistry], **(lossless | keys))
