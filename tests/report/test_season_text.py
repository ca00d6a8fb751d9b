"""The answer of season as text, table, document and pictures, and the command around it."""

import json
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest
from click.testing import CliRunner
from matplotlib.figure import Figure

from sunbot.cli import cli
from sunbot.inputs import load_robot
from sunbot.report import season_plots
from sunbot.report.season_text import season_text
from sunbot.report.tables import TRACE_COLUMNS, fortnight_table
from sunbot.studies import season

SITE = """
name = "Invented knoll"
latitude = 46.0
longitude = 9.0
time_zone = "Europe/Zurich"
snow_days = 0
horizon = [[0, 3], [180, 8]]
[climate]
ghi_kwh_m2_day = [1.2, 2.0, 3.2, 4.3, 5.1, 5.8, 6.0, 5.2, 3.8, 2.4, 1.4, 1.0]
temp_min_c = [-2, -1, 2, 6, 10, 14, 16, 15, 12, 7, 2, -1]
temp_max_c = [5, 7, 12, 16, 20, 25, 27, 26, 22, 16, 9, 5]
wind_m_s = 2.0
"""

ROBOT = """
name = "Invented post"
site = "site.toml"
heading_deg = 150
[target]
survival = 0.6
[deployment]                  # a few weeks, so that the tests are quick
from = "10-20"
to = "11-30"
[[panel]]
name = "lid"
watts = {watts}
vmp_v = 18.0
tilt_deg = 30
obstructions = [[100, 140, 50]]
[battery]
chemistry = "lifepo4"
cells_in_series = 4
capacity_ah = 20
[[rail]]
name = "logic"
kind = "step-down"
volts = 5.0
[[load]]
name = "computer"
rail = "logic"
watts = 0.5
[[load]]
name = "camera"
rail = "logic"
watts = 6.0
hours = [[9, 15]]
on_fraction = 0.3
skip_below_soc = 0.5
"""


def write(folder, watts=30):
    (folder / "site.toml").write_text(SITE)
    (folder / "robot.toml").write_text(ROBOT.format(watts=watts))
    return folder / "robot.toml"


@pytest.fixture(scope="module")
def found(tmp_path_factory):
    return season(load_robot(write(tmp_path_factory.mktemp("knoll"))), years=5)


def run(*words):
    return CliRunner().invoke(cli, ["season", *map(str, words)])


def test_text_tells_every_part(found):
    """Each part of the answer has its head, and figures in it are those of the result."""
    text = season_text(found)
    for head in (
        "Invented post at Invented knoll",
        "Month by month",
        "Lowest charge of the month, over the deployments",
        "The darkest days in a row",
        "The worst fortnight",
        "The work each month affords",
        "Best mount of the panel",
        "Harvest by the way the nose is held",
        "Hours of sun",
        "What moves the answer",
        "Cautions",
    ):
        assert head in text
    assert f"the one from year {found.worst.year_start.year - 2000}, 20 October" in text
    november = next(entry for entry in found.calendar.entries if entry.month == 11)
    assert f"  Nov  {november.minutes_per_day:>16.0f}" in text
    assert f"tilt {found.best_mount.tilt_deg:.0f} deg" in text
    assert text.count(" h out a year") == len(found.levers) + 1
    assert "nan" not in text
    assert not any(line != line.rstrip() for line in text.splitlines())


def test_months_the_robot_is_not_out_are_left_out(found):
    """In the table of headings only October and November have rows."""
    part = season_text(found).split("Harvest by the way the nose is held")[1].split("\n\n")[0]
    rows = [line.split()[0] for line in part.splitlines()[3:]]
    assert rows == ["Oct", "Nov"]


def test_calendar_rows_say_where_the_robot_is_not_out(found):
    """Ten months outside the deployment are told, not left out and not given work."""
    part = season_text(found).split("The work each month affords")[1].split("\n\n")[0]
    rows = {line.split()[0]: line for line in part.splitlines()[2:]}
    assert [month for month, row in rows.items() if "not out" not in row] == ["Oct", "Nov"]
    assert len(rows) == 12


def test_mounts_and_headings_say_on_how_many_years_they_stand(found):
    """All five here; the first five where more were generated."""
    assert season_text(found).count("means of all 5 years") == 2
    weather = found.check.weather
    longer = replace(weather, table=pd.concat([weather.table] * 2), row=np.concatenate([weather.row] * 2))
    text = season_text(replace(found, check=replace(found.check, weather=longer)))
    assert text.count("means of the first 5 of 10 years") == 2


def test_a_missed_target_names_both_remedies(found):
    """Less essential load, or what pick finds."""
    text = season_text(replace(found, calendar=replace(found.calendar, possible=False)))
    assert "Shrink the essential loads, or see" in text
    assert "sunbot pick for a larger panel or battery" in text


def test_a_long_name_of_a_load_is_not_clipped(found):
    """The column is as wide as its head."""
    entries = tuple(replace(entry, load="sight and sound of all things") for entry in found.calendar.entries)
    text = season_text(replace(found, calendar=replace(found.calendar, entries=entries)))
    assert "sight and sound of all things" in text


def test_csv_is_the_worst_fortnight_in_the_columns_of_check(found):
    table = fortnight_table(found)
    assert tuple(table.columns) == TRACE_COLUMNS
    assert len(table) == 14 * 24
    assert (pd.to_datetime(table["time"]).diff().dropna() == pd.Timedelta("1h")).all()
    assert table["soc"].to_numpy() == pytest.approx(found.worst.steps["soc"].to_numpy())


def test_command_delivers_text_and_files(tmp_path):
    """Exit 0 with a large panel: answer on stdout, CSV and picture written."""
    csv, plot = tmp_path / "fortnight.csv", tmp_path / "season.png"
    result = run(write(tmp_path, watts=60), "--years", 2, "--csv", csv, "--plot", plot)
    assert result.exit_code == 0, result.output
    assert "target met" in result.stdout
    assert csv.read_text().startswith(",".join(TRACE_COLUMNS))
    assert plot.read_bytes().startswith(b"\x89PNG")


def test_command_says_three_where_the_target_is_missed(tmp_path):
    """A panel far too small: exit 3, one JSON document alone on stdout, cautions on stderr."""
    result = run(write(tmp_path, watts=3), "--years", 2, "--json")
    assert result.exit_code == 3
    document = json.loads(result.stdout)
    assert document["verdict"]["target_met"] is False
    assert {entry["minutes_per_day"] for entry in document["calendar"]} == {0.0}
    assert "[safety]" in result.stderr


def test_wrong_input_is_two_and_writes_nothing(tmp_path):
    result = run(write(tmp_path), "--csv", tmp_path / "nowhere" / "x.csv")
    assert result.exit_code == 2
    assert "there is no folder" in result.stderr
    assert result.stdout == ""


def test_spell_frequency_draws_the_yearly_lows(found):
    """Markers are the sorted lows per day against (n + 1) / rank; a line beside each is the law."""
    ax = season_plots.plot_spell_frequency(Figure().subplots(), found)
    marks = [line for line in ax.get_lines() if line.get_linestyle() == "None"]
    assert len(marks) == len(found.dark_spells)
    for line, spell in zip(marks, found.dark_spells, strict=True):
        assert line.get_xdata()[0] == pytest.approx(6.0)
        assert line.get_ydata()[0] == pytest.approx(spell.wh / spell.days)
    assert "years" in ax.get_xlabel()
    assert "Wh/day" in ax.get_ylabel()


def test_calendar_bars_stand_where_the_months_are(found):
    ax = season_plots.plot_calendar(Figure().subplots(), found)
    heights = {round(bar.get_x() + bar.get_width() / 2): bar.get_height() for bar in ax.containers[0]}
    assert heights == {e.month - 1: pytest.approx(e.minutes_per_day) for e in found.calendar.entries}
    assert "minutes" in ax.get_ylabel()


def test_months_not_out_are_marked_in_the_calendar(found):
    """Ten months of grey with words, two without."""
    ax = season_plots.plot_calendar(Figure().subplots(), found)
    marked = {round(text.get_position()[0]) for text in ax.texts if text.get_text() == "not out"}
    assert marked == set(range(12)) - {9, 10}


def test_no_legend_of_the_sheet_lies_on_its_axes(found):
    """Each stands above."""
    figure = season_plots.season_figure(found)
    figure.draw_without_rendering()
    legends = [(ax, ax.get_legend()) for ax in figure.axes if ax.get_legend() is not None]
    assert len(legends) == 7
    for ax, legend in legends:
        assert legend.get_window_extent().y0 >= ax.get_window_extent().y1 - 0.5


def test_the_sheet_has_no_blank_row(found):
    """What does not apply leaves no gap: behind a window there are three rows, an odd last plot has its row alone."""
    figure = season_plots.season_figure(replace(found, sun=None, headings=()))
    assert figure.axes[0].get_gridspec().nrows == 3
    odd = season_plots.season_figure(replace(found, sun=None, headings=(), calendar=None))
    assert odd.axes[0].get_gridspec().nrows == 3
    last = odd.axes[-1].get_subplotspec()
    assert (last.colspan.start, last.colspan.stop) == (0, 2)


def test_a_load_can_have_any_name(found):
    """Dollars in a legend are dollars."""
    entries = tuple(replace(entry, load="$x^{$ arm") for entry in found.calendar.entries)
    figure = Figure()
    season_plots.plot_calendar(figure.subplots(), replace(found, calendar=replace(found.calendar, entries=entries)))
    figure.draw_without_rendering()


def test_plots_say_on_how_many_years_they_stand(found):
    ax = season_plots.plot_headings(Figure().subplots(), found)
    assert "means of all 5 years" in ax.get_title(loc="left")


def test_levers_are_ranked_bars(found):
    """One bar for each thing, the one at the top the first of the levers, no bar longer than that."""
    ax = season_plots.plot_levers(Figure().subplots(), found)
    names = [label.get_text() for label in ax.get_yticklabels()]
    assert names == list(dict.fromkeys(lever.what for lever in found.levers))[::-1]
    widths = [bar.get_width() for bar in ax.patches]
    assert len(widths) == 6
    if ax.get_xlabel() == "share of years alive":
        assert widths[-1] == pytest.approx(max(widths))


def test_sun_field_and_its_bars_tell_the_same_hours(found):
    """The bars beside the field are the hours lost to the horizon and the robot, month by month."""
    figure = Figure()
    field, side = figure.subplots(1, 2)
    season_plots.plot_sun_field(field, found)
    season_plots.plot_sun_lost(side, found)
    lost = np.array([bar.get_width() for bar in side.patches]).reshape(2, 12).sum(axis=0)
    sun = found.sun
    assert lost == pytest.approx(sun.hours_a_day(sun.behind_horizon + sun.behind_robot))
    picture = field.images[0].get_array()
    assert picture.shape == (365, len(sun.hour), 3)
    assert len(np.unique(picture[sun.behind_horizon], axis=0)) == 1
    assert "clock" in field.get_xlabel()


def test_heading_lines_are_shares_of_the_best_fixed(found):
    ax = season_plots.plot_headings(Figure().subplots(), found)
    lines = {line.get_label().split(" (")[0]: line.get_ydata() for line in ax.get_lines()}
    out = ~np.isnan(lines["best fixed"])
    assert np.flatnonzero(out).tolist() == [9, 10]
    assert lines["best fixed"][out] == pytest.approx(1.0)
    assert (lines["turns to sun"][out] > lines["worst parked"][out]).all()
    assert (lines["as filed, nothing in the way"][out] > lines["as filed"][out]).all()


def test_fortnight_draws_power_and_charge(found):
    figure = Figure()
    ax = season_plots.plot_fortnight(figure.subplots(), found)
    charge = next(other for other in figure.axes if other is not ax)
    assert charge.get_lines()[0].get_ydata() == pytest.approx(found.worst.steps["soc"].to_numpy())
    assert "[W]" in ax.get_ylabel()
