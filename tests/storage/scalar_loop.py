"""The balance once more, the slow way: one robot, one step after the other, floats and ``if``.

It shares no code with the package and exists to be compared with it. Everything is in pack units (Wh, W, A, V);
the package works per ampere-hour. The year is gone round until a whole round changes nothing.
"""

import math
from dataclasses import dataclass, field

TABLE_NODES = 513
HOURS_A_MONTH = 730.5

NODES = [0.0, 0.05, 0.10, 0.20, 0.30, 0.40, 0.50, 0.60, 0.70, 0.80, 0.90, 0.95, 1.0]
CELLS = {
    "lifepo4": [2.708, 3.089, 3.199, 3.252, 3.283, 3.302, 3.309, 3.313, 3.324, 3.338, 3.345, 3.352, 3.422],
    "li-ion": [3.000, 3.233, 3.392, 3.507, 3.605, 3.682, 3.767, 3.852, 3.957, 4.048, 4.097, 4.125, 4.200],
    "nimh": [1.05, 1.16, 1.19, 1.22, 1.235, 1.245, 1.25, 1.26, 1.27, 1.285, 1.31, 1.34, 1.40],
    "lead-acid": [volts / 6 for volts in (11.7, 12.0, 12.25, 12.55, 12.85)],
}
LEAD_NODES = [0.0, 0.25, 0.50, 0.75, 1.0]
CUTOFF = {"lifepo4": 0.10, "li-ion": 0.10, "nimh": 0.10, "lead-acid": 0.50}
RESTART = {"lifepo4": 0.25, "li-ion": 0.25, "nimh": 0.25, "lead-acid": 0.60}
MOHM_AH = {"lifepo4": 60.0, "li-ion": 60.0, "nimh": 120.0, "lead-acid": 40.0}
CHARGE_C = {"lifepo4": 0.5, "li-ion": 0.5, "nimh": 0.5, "lead-acid": 0.25}
TAIL_H = {"lifepo4": 0.3, "li-ion": 0.5, "nimh": 0.0, "lead-acid": 1.0}
TOP_V = {"lifepo4": 3.60, "li-ion": 4.20, "nimh": math.inf, "lead-acid": 2.40}
FADE_PCT = {"lifepo4": 2.5, "li-ion": 2.5, "nimh": 20.0, "lead-acid": 3.0}
CHARGE_MIN = {"lifepo4": 0.0, "li-ion": 0.0, "nimh": 0.0, "lead-acid": -15.0}

FATES = [
    "panel",
    "panel_wire",
    "controller",
    "spilled",
    "battery_loss",
    "self_discharge",
    "heater",
    "boots",
    "off_draw",
    "rails",
    "rail_wire",
    "idle",
    "loads",
    "stored",
]
MONTHLY = ["unserved", "skipped", "work_asked", "hours_out", "harvest", "demand"]


@dataclass
class Case:
    """One robot and its weather in plain numbers; lists are [time][volt node] unless said."""

    battery: object  # attributes as in the robot file
    worn: bool
    capacity_ah: float  # of the pack, new
    step_h: float  # of the weather, for the box
    air_c: list
    hours: list  # [year][step]
    row: list  # [year][step] -> time
    month: list  # [step]
    before: list  # [year]
    demand_row: list  # [time] -> row of the demand
    supply_v: list
    offer: list
    panel: list
    wire: list
    own_use_w: float
    demand_v: list
    essential: list  # [row][volt node] -> (loads, rails, wire, idle)
    work: list  # [row][level][volt node] -> (loads, rails, wire, idle)
    skip_soc: list
    work_x: list  # [month 0-11][level]
    light_x: float = 1.0
    essential_x: float = 1.0
    extra_w: float = 0.0


@dataclass
class Year:
    """What one energy year came to; monthly sums by calendar month."""

    end_wh: float = 0.0
    on: bool = True
    visits: int = 0
    outages: int = 0
    longest_h: float = 0.0
    first_out: list = field(default_factory=lambda: [-1] * 12)
    cannot_give: bool = False
    monthly: dict = field(default_factory=lambda: {name: [0.0] * 12 for name in MONTHLY})
    spilled: list = field(default_factory=lambda: [0.0] * 12)
    lowest: list = field(default_factory=lambda: [math.inf] * 12)
    fates: dict = field(default_factory=lambda: dict.fromkeys(FATES, 0.0))
    soc: list = field(default_factory=list)


class Pack:
    """The battery of the case: tables, and what the cold does to it."""

    def __init__(self, case):
        b, kind = case.battery, case.battery.chemistry
        self.b, self.kind = b, kind
        self.ah = case.capacity_ah * (b.worn_capacity if case.worn else 1.0)
        self.points = LEAD_NODES if kind == "lead-acid" else NODES
        self.volts = [b.cells_in_series * v for v in CELLS[kind]]
        self.full = self.energy(1.0)
        self.node_wh = self.full / (TABLE_NODES - 1)
        self.socs = [self.soc_of_energy(k * self.node_wh) for k in range(TABLE_NODES)]
        self.rests = [self.rest(soc) for soc in self.socs]
        self.effs = [self.efficiency_at(soc) for soc in self.socs]
        if b.resistance_mohm is None:
            ohm = MOHM_AH[kind] / 1000 * b.cells_in_series / case.capacity_ah
        else:  # the pack written; a larger one has the same cells beside each other
            ohm = b.resistance_mohm / 1000 * b.capacity_ah / case.capacity_ah
        self.ohm_25 = ohm * (2.0 if case.worn else 1.0)
        self.cutoff = CUTOFF[kind] if b.cutoff_soc is None else b.cutoff_soc
        self.restart = RESTART[kind] if b.restart_soc is None else b.restart_soc
        self.charge_c = CHARGE_C[kind] if b.max_charge_c is None else b.max_charge_c
        fade = FADE_PCT[kind] if b.self_discharge_pct_month is None else b.self_discharge_pct_month
        self.fade_per_h = -math.log(1 - fade / 100) / HOURS_A_MONTH
        self.cold = CHARGE_MIN[kind] if b.charge_min_c is None else b.charge_min_c
        self.hot = 45.0 if b.charge_max_c is None else b.charge_max_c

    def rest(self, soc):
        for k in range(1, len(self.points)):
            if soc <= self.points[k] or k == len(self.points) - 1:
                share = (soc - self.points[k - 1]) / (self.points[k] - self.points[k - 1])
                return self.volts[k - 1] + share * (self.volts[k] - self.volts[k - 1])

    def energy(self, soc):
        """Stored Wh at a charge: volts summed over charge, trapeze by trapeze."""
        wh = 0.0
        for k in range(1, len(self.points)):
            low, high = self.points[k - 1], min(self.points[k], soc)
            if high > low:
                wh += (high - low) * (self.volts[k - 1] + self.rest(high)) / 2 * self.ah
        return wh

    def soc_of_energy(self, wh):
        """The charge at stored Wh: the root of the trapeze that holds it."""
        left = wh / self.ah
        for k in range(1, len(self.points)):
            width = self.points[k] - self.points[k - 1]
            area = width * (self.volts[k - 1] + self.volts[k]) / 2
            if left <= area or k == len(self.points) - 1:
                slope = (self.volts[k] - self.volts[k - 1]) / width
                v0 = self.volts[k - 1]
                return self.points[k - 1] + 2 * left / (v0 + math.sqrt(v0 * v0 + 2 * slope * left))
            left -= area

    def efficiency_at(self, soc):
        if self.b.charge_efficiency is not None:
            return self.b.charge_efficiency
        if self.kind == "lead-acid":
            return 0.95 if soc <= 0.8 else 0.95 + (soc - 0.8) / 0.2 * (0.85 - 0.95)
        if self.kind == "nimh":
            return 0.90 if soc <= 0.7 else 0.90 + (soc - 0.7) / 0.3 * (0.66 - 0.90)
        return 0.99

    def read(self, table, wh):
        place = wh / self.node_wh
        k = min(int(place), TABLE_NODES - 2)
        return table[k] + (place - k) * (table[k + 1] - table[k])

    def ohm(self, temp):
        return self.ohm_25 * (2 ** ((25 - temp) / 35) if temp < 25 else 1.0)

    def threshold_wh(self, soc, temp):
        """Stored Wh at which a threshold in charge lies when the cold locks part of the capacity."""
        if temp >= 25:
            usable = 1.0
        elif self.kind == "lead-acid":
            usable = 1 - 0.01 * (25 - temp)
        elif temp >= 0:
            usable = 0.8 + 0.2 * temp / 25
        else:
            usable = 0.8 + 0.25 * temp / 20
        usable = max(usable, 0.05)
        return self.energy(1 - usable + usable * soc)

    def fade(self, temp):
        return self.fade_per_h * 2 ** ((temp - 20) / 10)

    def acceptance_a(self, wh, temp, hours):
        if not self.cold <= temp <= self.hot:
            return 0.0
        limit_c = self.charge_c
        if self.kind == "lifepo4" and temp < 15:
            limit_c = min(limit_c, 0.2)
        top = TOP_V[self.kind] - (0.004 * (temp - 25) if self.kind == "lead-acid" else 0.0)
        volts = self.read(self.rests, wh)
        by_voltage = max(0.0, (self.b.cells_in_series * top - volts) / self.ohm(temp))
        tail = TAIL_H[self.kind] * (2 ** ((25 - temp) / 25) if temp < 25 else 1.0)
        share = 1 - math.exp(-hours / tail) if tail > 0 else 1.0
        by_missing = (self.full - wh) * share / (hours * volts * self.read(self.effs, wh))
        return max(0.0, min(limit_c * self.ah, by_voltage, by_missing))


def at_volts(nodes, values, volts):
    """Linear between evenly spaced nodes; one node needs nothing."""
    if len(nodes) == 1:
        return values[0]
    place = (volts - nodes[0]) / (nodes[1] - nodes[0])
    k = max(0, min(int(place), len(nodes) - 2))
    return values[k] + (place - k) * (values[k + 1] - values[k])


def box_temperatures(case):
    """Air through the lag of the box, gone round until it repeats; then the rise."""
    lag = case.battery.box_lag_h
    keep = math.exp(-case.step_h / lag) if lag > 0 else 0.0
    temp, last = case.air_c[-1], None
    series = []
    while series != last:
        last, series = series, []
        for air in case.air_c:
            temp = keep * temp + (1 - keep) * air
            series.append(temp)
    return [temp + case.battery.box_rise_c for temp in series]


class Walk:
    """One lane: an energy year from a start state, step by step."""

    def __init__(self, case, pack, box, year):
        self.case, self.pack, self.box, self.year = case, pack, box, year
        self.on, self.clock_h, self.cut_at_h = True, 0.0, 0.0

    def run(self, start_wh):
        case, out = self.case, Year()
        self.out, self.wh = out, start_wh
        for s, (row, hours) in enumerate(zip(case.row[self.year], case.hours[self.year], strict=True)):
            if hours > 0:
                self.s, self.m, self.t = s, case.month[s] - 1, row
                self.step(hours)
                self.clock_h += hours
            out.soc.append(self.pack.read(self.pack.socs, self.wh))
        if not self.on:
            out.longest_h = max(out.longest_h, self.clock_h - self.cut_at_h)
        out.end_wh, out.on = self.wh, self.on
        out.fates["stored"] = self.wh - start_wh
        return out

    def harvest(self, volts):
        case = self.case
        return [case.light_x * at_volts(case.supply_v, x[self.t], volts) for x in (case.panel, case.wire, case.offer)]

    def book_harvest(self, hours, panel, wire, offer):
        f = self.out.fates
        f["panel"] += panel * hours
        f["panel_wire"] += wire * hours
        f["controller"] += (panel - wire - offer) * hours
        self.out.monthly["harvest"][self.m] += offer * hours

    def note_low(self):
        soc = self.pack.read(self.pack.socs, self.wh)
        self.out.lowest[self.m] = min(self.out.lowest[self.m], soc)

    def asked(self):
        """Essential and skippable power by part, at the rest voltage of now."""
        case = self.case
        volts = self.pack.read(self.pack.rests, self.wh)
        r = case.demand_row[self.t]
        essential = [
            case.essential_x * at_volts(case.demand_v, [node[p] for node in case.essential[r]], volts) for p in range(4)
        ]
        essential[0] += case.extra_w
        work = [
            [case.work_x[self.m][k] * at_volts(case.demand_v, [node[p] for node in level], volts) for p in range(4)]
            for k, level in enumerate(case.work[r])
        ]
        return essential, work

    def step(self, hours):
        case, pack, b, out = self.case, self.pack, self.case.battery, self.out
        natural = self.box[self.t]
        temp, heater = natural, 0.0
        if b.heater_w > 0 and natural < b.heater_on_below_c:
            temp, heater = b.heater_on_below_c, b.heater_w
            if b.box_loss_w_per_k is not None:
                # A thermostat: what flows out through the walls at its temperature, if the heater has that much.
                flows_w = (b.heater_on_below_c - natural) * b.box_loss_w_per_k
                if flows_w <= b.heater_w:
                    heater = flows_w
                else:
                    temp = natural + b.heater_w / b.box_loss_w_per_k
        cut_wh = pack.threshold_wh(pack.cutoff, temp)

        if not self.on:
            back = pack.threshold_wh(pack.restart, natural)
            cold_cut = pack.threshold_wh(pack.cutoff, natural)
            if self.wh >= back and self.wh - b.boot_wh > cold_cut:
                self.wh -= b.boot_wh
                out.fates["boots"] += b.boot_wh
                self.on = True
                out.longest_h = max(out.longest_h, self.clock_h - self.cut_at_h)
        self.note_low()

        essential, work = self.asked()
        out.monthly["demand"][self.m] += (sum(essential) + sum(map(sum, work))) * hours
        for parts in work:
            out.monthly["work_asked"][self.m] += sum(parts) * hours
        if not self.on:
            self.not_served(hours, essential, work)
            self.coast(hours, natural)
            self.note_low()
            return

        volts = pack.read(pack.rests, self.wh)
        panel, wire, offer = self.harvest(volts)
        net = offer - sum(essential) - case.own_use_w - heater
        room = net * hours
        kept = self.wh * (1 - pack.fade(temp) * hours)
        ohm = pack.ohm(temp)
        done = []
        for k, parts in enumerate(work):
            threshold = pack.threshold_wh(case.skip_soc[k], temp)
            asked = sum(parts) * hours
            # Above the threshold: all that is stored there less I2R of drawing it, as far as current brings power.
            spare = kept - threshold
            if spare > 0:
                drawn = min(spare, volts * volts * hours / (2 * ohm))
                spare -= ohm / (volts * volts * hours) * drawn * drawn
            served = max(0.0, min(asked, room + spare))
            room -= served
            done.append(served)
        power = net - sum(done) / hours

        inside = volts * volts + 4 * ohm * power
        share, dropped = 1.0, inside < 0
        if dropped:
            out.cannot_give = True
            share = 0.0
        else:
            amps = 2 * power / (volts + math.sqrt(inside))
            accepted = power
            if amps > 0:
                most = pack.acceptance_a(self.wh, temp, hours)
                if amps > most:
                    amps = most
                    accepted = amps * (volts + ohm * amps)
            eff = pack.read(pack.effs, self.wh) if amps > 0 else 1.0
            fade = pack.fade(temp) * self.wh * hours
            end = self.wh + volts * amps * hours * eff - fade
            if end < cut_wh and power < 0:
                dropped = True
                share = max(0.0, min(1.0, (self.wh - cut_wh) / (self.wh - end)))

        on_h = share * hours
        self.book_harvest(on_h, panel, wire, offer)
        f = out.fates
        if share > 0:
            f["spilled"] += (power - accepted) * on_h
            out.spilled[self.m] += (power - accepted) * on_h
            f["battery_loss"] += (ohm * amps * amps + volts * amps * (1 - eff)) * on_h
            f["self_discharge"] += fade * share
        f["heater"] += heater * on_h
        f["controller"] += case.own_use_w * on_h
        for name, part in zip(("loads", "rails", "rail_wire", "idle"), essential, strict=True):
            f[name] += part * on_h
        for parts, served in zip(work, done, strict=True):
            asked = sum(parts) * hours
            out.monthly["skipped"][self.m] += asked - share * served
            for name, part in zip(("loads", "rails", "rail_wire", "idle"), parts, strict=True):
                if asked > 0:
                    f[name] += part * hours * share * served / asked

        if not dropped:
            self.wh = end
        else:
            if share > 0:
                self.wh = min(self.wh, cut_wh)
                self.note_low()
            self.drop(on_h)
            self.not_served(hours - on_h, essential, [])
            self.coast(hours - on_h, natural)
        self.note_low()

    def drop(self, after_h):
        out = self.out
        self.on, self.cut_at_h = False, self.clock_h + after_h
        out.outages += 1
        if out.first_out[self.m] < 0:
            out.first_out[self.m] = self.s

    def not_served(self, hours, essential, work):
        monthly = self.out.monthly
        monthly["hours_out"][self.m] += hours
        monthly["unserved"][self.m] += sum(essential) * hours
        for parts in work:
            monthly["skipped"][self.m] += sum(parts) * hours

    def coast(self, hours, temp):
        """Loads off: harvest charges, small draws go on as long as there is anything left."""
        case, pack, f = self.case, self.pack, self.out.fates
        if hours <= 0:
            return
        volts, ohm = pack.read(pack.rests, self.wh), pack.ohm(temp)
        panel, wire, offer = self.harvest(volts)
        self.book_harvest(hours, panel, wire, offer)
        draw = case.own_use_w + case.battery.off_draw_w
        power = max(offer - draw, -volts * volts / (4 * ohm))
        undrawn = power - (offer - draw)
        amps = 2 * power / (volts + math.sqrt(max(0.0, volts * volts + 4 * ohm * power)))
        fade = pack.fade(temp) * self.wh * hours
        share, eff, accepted = 1.0, 1.0, power
        if amps > 0:
            most = pack.acceptance_a(self.wh, temp, hours)
            if amps > most:
                amps = most
                accepted = amps * (volts + ohm * amps)
            eff = pack.read(pack.effs, self.wh)
            spilled = (power - accepted) * hours
            f["spilled"] += spilled
            self.out.spilled[self.m] += spilled
        move = volts * amps * hours * eff
        if move < 0 and self.wh - fade + move < 0:
            share = (self.wh - fade) / -move
        f["battery_loss"] += (ohm * amps * amps + volts * amps * (1 - eff)) * hours * share
        f["self_discharge"] += fade
        drawn = (draw - undrawn) * hours + (1 - share) * power * hours
        if draw > 0:
            f["controller"] += drawn * case.own_use_w / draw
            f["off_draw"] += drawn * case.battery.off_draw_w / draw
        self.wh = 0.0 if share < 1 else self.wh - fade + move


def go_round(case):
    """Every energy year in turn until a round changes nothing; (list of Year, settled)."""
    pack, box = Pack(case), box_temperatures(case)
    fresh = pack.energy(case.battery.start_soc)
    n = len(case.before)
    if case.before[0] < 0:
        return [Walk(case, pack, box, y).run(fresh) for y in range(n)], True
    order = [0]
    while len(order) < n:
        order.append(case.before.index(order[-1]))
    years, starts, state = [None] * n, None, (fresh, 0)
    for _ in range(20):
        last, starts = starts, []
        for y in order:
            starts.append(state)
            years[y] = Walk(case, pack, box, y).run(state[0])
            years[y].visits = state[1]
            state = (years[y].end_wh, 0) if years[y].on else (fresh, 1)
        if starts == last:
            return years, True
    return years, False
