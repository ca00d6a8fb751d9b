"""The answer of pick as text, table, document and picture, and the command around it."""

import json
import signal
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path

import pytest
from click.testing import CliRunner
from matplotlib.figure import Figure

from sunbot.cli import cli
from sunbot.inputs import load_robot
from sunbot.report.pick_plots import pick_figure, plot_frontier, plot_survival
from sunbot.report.pick_text import pick_text
from sunbot.report.progress import Progress, duration
from sunbot.sky import weather_for
from sunbot.studies import pick

SITE = """
name = "Invented knoll"
latitude = 46.0
longitude = 9.0
time_zone = "Europe/Zurich"
snow_days = 0
[climate]
ghi_kwh_m2_day = [1.2, 2.0, 3.2, 4.3, 5.1, 5.8, 6.0, 5.2, 3.8, 2.4, 1.4, 1.0]
temp_min_c = [-2, -1, 2, 6, 10, 14, 16, 15, 12, 7, 2, -1]
temp_max_c = [5, 7, 12, 16, 20, 25, 27, 26, 22, 16, 9, 5]
wind_m_s = 2.0
"""
ROBOT = """
name = "Invented post"
site = "site.toml"
heading_deg = 180
[target]
survival = 0.6
[[panel]]
name = "lid"
watts = 40
vmp_v = 18.0
tilt_deg = 40
mass_kg = 3.0
[battery]
chemistry = "li-ion"
cells_in_series = 3
capacity_ah = 20
mass_kg = 2.0
[[rail]]
name = "logic"
kind = "step-down"
volts = 5.0
[[load]]
name = "logger"
rail = "logic"
watts = 1.0
"""


@pytest.fixture(scope="module")
def robot_file(tmp_path_factory):
    folder = tmp_path_factory.mktemp("knoll")
    (folder / "site.toml").write_text(SITE, encoding="utf-8")
    (folder / "robot.toml").write_text(ROBOT, encoding="utf-8")
    return folder / "robot.toml"


@pytest.fixture(scope="module")
def result(robot_file):
    robot = load_robot(robot_file)
    weather = weather_for(robot.site, years=2, seed=1)
    return pick(robot, watts=(1.0, 40.0, 60.0, 80.0), weather=weather, also=("map",))


def run(robot_file, *options):
    return CliRunner().invoke(cli, ["pick", str(robot_file), "--years", "2", *options])


def test_the_text_leads_with_the_pair_and_lists_every_wattage(result):
    """The pair and why first, then its neighbours, the frontier, the arithmetic beside it."""
    text = pick_text(result)
    taken = result.recommended
    assert f"take {taken.watts:.4g} W of panel and {taken.battery_ah:.4g} Ah" in text
    assert text.index("why:") < text.index("One step beside it") < text.index("The smallest battery for each panel")
    assert "none of any size: the panel gives less than the target asks for" in text
    assert "autonomy days" in text
    assert "mass kg" in text
    assert max(len(line) for line in text.splitlines()) < 110


def test_a_panel_without_a_battery_says_what_was_tried_and_what_fails(robot_file):
    """The largest battery of the range, and how many years it was alive with that."""
    robot = load_robot(robot_file)
    found = pick(robot, watts=(40.0,), battery_ah=(0.2, 0.5), weather=weather_for(robot.site, years=2, seed=1))
    assert found.battery_range_ah == (0.2, 0.5)
    (short,) = found.shortfalls
    assert (short.watts, short.battery_ah) == (40.0, 0.5)
    # A night of 8 h and more asks for 8 Wh from 0.5 Ah x 11 V: no year is survived.
    assert short.survival == 0.0
    text = pick_text(found)
    assert "none up to 0.5 Ah: alive in 0% of years with that" in text
    assert "NONE of the pairs in range meets the target: a panel of 40 W, batteries from 0.2 to 0.5 Ah." in text
    assert found.to_dict()["shortfalls"] == [{"watts": 40.0, "battery_ah": 0.5, "survival": 0.0, "work_done": None}]


def test_pairs_that_fail_in_other_years_are_marked(result):
    """A star and what it means; no star, no legend."""
    first, *rest = [pair for pair in result.pairs if pair.battery_ah is not None]
    failing, passing = {"confirmed": 0.5, "confirmed_met": False}, {"confirmed": 1.0, "confirmed_met": True}
    pairs = (replace(first, **failing), *(replace(pair, **passing) for pair in rest))
    text = pick_text(replace(result, pairs=pairs))
    assert text.count("50%*") == 1
    assert "* misses the target in the other years" in text
    passed = replace(result, pairs=tuple(replace(pair, **passing) for pair in pairs))
    assert "*" not in pick_text(passed)


def test_a_pair_whose_work_falls_short_in_other_years_is_marked_too(result):
    """Alive in all of them, and yet no pair to take."""
    pairs = tuple(
        pair if pair.battery_ah is None else replace(pair, confirmed=1.0, confirmed_met=False) for pair in result.pairs
    )
    assert "100%*" in pick_text(replace(result, pairs=pairs))


def test_shares_of_pairs_are_not_rounded_across_the_target(result):
    """59.8 % of years is not 60."""
    pairs = tuple(
        pair if pair.battery_ah is None else replace(pair, confirmed=0.598, confirmed_met=False)
        for pair in result.pairs
    )
    assert "59.8%*" in pick_text(replace(result, pairs=pairs))


def test_the_plots_draw_the_pairs_with_units_on_the_axes(result):
    """Frontier: a point for each pair; map: a field for each pair tried."""
    upper, lower = Figure().subplots(2, 1)
    have = [pair for pair in result.pairs if pair.battery_ah is not None]
    plot_frontier(upper, result)
    assert list(upper.lines[0].get_ydata()) == [pair.battery_ah for pair in have]
    assert upper.get_xlabel() == "panel [W]"
    assert upper.get_ylabel() == "battery when new [Ah]"
    plot_survival(lower, result)
    assert lower.collections[0].get_array().size == result.survival_map.survival.size
    assert lower.get_ylabel() == "battery when new [Ah]"


def tick_labels(axis):
    axis.get_figure().draw_without_rendering()
    low, high = sorted(axis.get_view_interval())
    return [tick.label1.get_text() for tick in axis.get_major_ticks() if low <= tick.get_loc() <= high]


def test_a_single_wattage_is_a_column_of_the_map_not_a_blank(robot_file):
    """The field reaches half a step to either side; the axis of batteries has plain numbers."""
    robot = load_robot(robot_file)
    found = pick(robot, watts=(60.0,), weather=weather_for(robot.site, years=2, seed=1), also=("map",))
    ax = plot_survival(Figure().subplots(), found)
    box = ax.collections[0].get_datalim(ax.transData)
    assert (box.x0, box.x1) == (-0.5, 0.5)
    over = found.survival_map.battery_ah
    assert box.y0 < over[0] < over[-1] < box.y1
    labels = tick_labels(ax.yaxis)
    assert len(labels) >= 2
    assert all(float(label) > 0 for label in labels)


def test_the_map_says_what_its_colours_leave_out(result, robot_file):
    """Where work is asked for, being alive is not meeting the target."""
    assert "work" not in plot_survival(Figure().subplots(), result).get_title(loc="left")
    load = result.robot.loads[0].model_copy(update={"skip_below_soc": 0.4, "name": "camera"})
    working = replace(result, robot=result.robot.model_copy(update={"loads": (*result.robot.loads, load)}))
    ax = plot_survival(Figure().subplots(), working)
    assert "work may still fall short" in ax.get_title(loc="left")
    assert "work included" in ax.get_legend().get_texts()[0].get_text()


@pytest.mark.parametrize(
    ("survival", "top"), [(0.945, ["90%", "94.5%", "100%"]), (1.0, ["80%", "90%", "100%"])], ids=["odd", "all"]
)
def test_the_target_is_told_exactly_beside_the_colours(result, survival, top):
    """An edge of the colours at 94.5 % is labelled so, and all years are 100 % once."""
    target = result.robot.target.model_copy(update={"survival": survival})
    odd = replace(result, robot=result.robot.model_copy(update={"target": target}))
    ax = plot_survival(Figure().subplots(), odd)
    bar = next(other for other in ax.figure.axes if other is not ax)
    assert [label.get_text() for label in bar.get_yticklabels()][-3:] == top


def test_no_empty_frame_where_no_pair_meets_the_target(robot_file):
    """One plot: the wattages that have no battery, and the range tried."""
    robot = load_robot(robot_file)
    weather = weather_for(robot.site, years=2, seed=1)
    found = pick(robot, watts=(1.0, 2.0), battery_ah=(1.0, 2.0), weather=weather, also=("map",))
    (ax,) = pick_figure(found).axes
    (marks,) = [line for line in ax.lines if line.get_marker() == "x"]
    assert list(marks.get_xdata()) == [1.0, 2.0]
    assert "no battery from 1 to 2 Ah does" in marks.get_label()
    assert not any("smallest" in text.get_text() for text in ax.get_legend().get_texts())


def test_pairs_that_fail_in_other_years_are_hollow(result):
    pairs = tuple(pair if pair.battery_ah is None else replace(pair, confirmed_met=False) for pair in result.pairs)
    ax = plot_frontier(Figure().subplots(), replace(result, pairs=pairs))
    (hollow,) = [line for line in ax.lines if "misses it in other years" in line.get_label()]
    assert list(hollow.get_xdata()) == [pair.watts for pair in pairs if pair.battery_ah is not None]
    assert hollow.get_markerfacecolor() == "white"


def test_the_command_prints_one_document_and_writes_table_and_picture(robot_file, tmp_path):
    """JSON alone on stdout, cautions on stderr, a table of the pairs, a PNG; exit code 0."""
    csv, plot = tmp_path / "pairs.csv", tmp_path / "pairs.png"
    done = run(robot_file, "--watts", "40:80:40", "--json", "--csv", str(csv), "--plot", str(plot))
    assert done.exit_code == 0, done.output
    document = json.loads(done.stdout)
    assert [pair["watts"] for pair in document["pairs"]] == [40.0, 80.0]
    assert document["inputs"]["years"] == 2
    assert csv.read_text(encoding="utf-8").startswith(
        "watts,battery_ah,survival,confirmed,work_done,mass_kg,price,confirmed_met\n"
    )
    assert plot.read_bytes().startswith(b"\x89PNG")


def test_no_pair_in_range_is_exit_code_three(robot_file):
    """A build job can gate on it."""
    done = run(robot_file, "--watts", "0.5,1", "--battery-ah", "1:2")
    assert done.exit_code == 3
    assert "NONE of the pairs" in done.stdout


@pytest.mark.parametrize(
    ("options", "says"),
    [
        (("--watts", "10-120"), "--watts 10-120: '10-120' is not a number. Write LOW:HIGH:STEP"),
        (("--watts", "10:120"), "3 numbers are needed between colons, here are 2"),
        (("--watts", "120:10:10"), "10 is below 120"),
        (("--watts", "0:50:10"), "0 is not above 0"),
        (("--watts", "1:1000:1"), "at most 200"),
        (("--watts", "nan"), "nan is not above 0"),
        (("--battery-ah", "5"), "2 numbers are needed between colons, here are 1. Write LOW:HIGH"),
        (("--battery-ah", "60:5"), "5 is not above 60"),
        (("--plot", "pairs.txt"), "no plot can be written in this format"),
    ],
)
def test_wrong_ranges_say_what_to_write(robot_file, options, says):
    """Exit code 2, nothing on stdout, the option and the remedy in the message."""
    done = run(robot_file, *options)
    assert done.exit_code == 2
    assert done.stdout == ""
    assert says in done.stderr


class Terminal:
    """A stream that says it is a terminal, or not."""

    def __init__(self, tty):
        self.tty, self.text = tty, ""

    def isatty(self):
        return self.tty

    def write(self, text):
        self.text += text

    def flush(self):
        pass


def test_progress_shows_on_a_terminal_only_and_only_after_a_second(monkeypatch):
    """The time left is what the rest takes at the pace so far; the line is wiped at the end."""
    now = [100.0]
    monkeypatch.setattr(time, "monotonic", lambda: now[0])
    seen = {}
    for tty in (True, False):
        now[0] = 100.0
        stream = Terminal(tty)
        with Progress(stream) as progress:
            now[0] = 100.5
            progress(0.05)
            assert stream.text == ""
            now[0] = 110.0
            progress(0.25)
            seen[tty] = stream.text
        assert stream.text == "" or stream.text.endswith("\r")
    assert "25%, about 30 s left" in seen[True]
    assert seen[False] == ""
    assert duration(300) == "5 min"


def test_an_interrupt_ends_at_once_and_leaves_no_half_file(robot_file, tmp_path):
    """Ctrl-C: exit code 130 within a second, no file, no traceback."""
    out = tmp_path / "pairs.csv"
    command = [sys.executable, "-m", "sunbot", "pick", str(robot_file), "--watts", "20:130:10", "--years", "100"]
    with subprocess.Popen(
        [*command, "--csv", str(out)], stdout=subprocess.PIPE, stderr=subprocess.PIPE, cwd=Path.cwd(), text=True
    ) as running:
        time.sleep(3.0)
        assert running.poll() is None
        asked = time.monotonic()
        running.send_signal(signal.SIGINT)
        stdout, stderr = running.communicate(timeout=20)
        took_s = time.monotonic() - asked
    assert running.returncode == 130
    assert took_s < 1.0
    assert stdout == ""
    assert "Interrupted" in stderr
    assert "Traceback" not in stderr
    assert list(tmp_path.iterdir()) == []
