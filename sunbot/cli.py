"""The command line: options in, exit codes out."""

from __future__ import annotations

import contextlib
import errno
import os
import shlex
import signal
import sys
import threading
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from . import __version__
from .errors import Fault, InputError, UndeliveredError

if TYPE_CHECKING:
    from .inputs import Robot, Site

F = TypeVar("F", bound=Callable[..., Any])

TARGET_NOT_MET = 3
INTERRUPTED = 130
INTERRUPTED_NOTE = "\nInterrupted: nothing was written."
UNWOUND_S = 0.6
"""How long an interrupted command may take to unwind, before it is ended by force."""
STDOUT_TROUBLE = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG, errno.EIO, errno.EBADF)
"""What an error without a file name says when it is stdout that takes nothing; files report theirs as wrong input."""
MOST_SIZES = 200
ROBOT_OR_SITE_FILE = click.Path(path_type=Path)
OUT_FILE = click.Path(dir_okay=False, path_type=Path)


class WrongInput(click.ClickException):
    """The user's mistake: every fault on a line of stderr, exit code 2."""

    exit_code = 2

    def show(self, file: Any = None) -> None:
        click.echo(self.message, err=True)


class Commands(click.Group):
    """Turns wrong input and an interrupt into their exit codes, for every command."""

    def invoke(self, ctx: click.Context) -> Any:
        try:
            return super().invoke(ctx)
        except UndeliveredError as error:
            click.echo(error.answer, nl=False)
            raise WrongInput(str(error)) from error
        except InputError as error:
            raise WrongInput(str(error)) from error
        except KeyboardInterrupt as error:
            click.echo(INTERRUPTED_NOTE, err=True)
            raise click.exceptions.Exit(INTERRUPTED) from error


class Sizes(click.ParamType):  # type: ignore[type-arg]  # generic since click 8.2
    """LOW:HIGH:STEP or a list by commas, as ascending numbers above 0."""

    name = "sizes"
    example = "LOW:HIGH:STEP, e.g. 10:120:10, or a list, e.g. 20,40,60"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> list[float]:
        where = _where(param, value)
        if ":" not in value:
            return sorted(set(_numbers(value.split(","), where, self.example)))
        low, high, step = _numbers(value.split(":"), where, self.example, count=3)
        if high < low:
            raise InputError(Fault(where, f"{high:g} is below {low:g}", f"the smaller first: {self.example}"))
        count = int((high - low) / step * (1 + 1e-9)) + 1
        if count > MOST_SIZES:
            raise InputError(Fault(where, f"these are {count} sizes, at most {MOST_SIZES} are tried", "a larger step"))
        return [low + at * step for at in range(count)]


class Range(click.ParamType):  # type: ignore[type-arg]
    """LOW:HIGH, two capacities above 0 and as batteries have them, the smaller first."""

    name = "range"
    example = "LOW:HIGH, the smaller first, e.g. 5:60"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> tuple[float, float]:
        from .inputs.sizes import MOST_AH

        where = _where(param, value)
        low, high = _numbers(value.split(":"), where, self.example, count=2)
        if high <= low:
            raise InputError(Fault(where, f"{high:g} is not above {low:g}", self.example))
        if high > MOST_AH:
            milli = f"{low / 1000:g}:{high / 1000:g} if these are milliampere-hours"
            raise InputError(Fault(where, f"up to {MOST_AH:g} Ah are believed", milli))
        return low, high


def _where(param: click.Parameter | None, value: str) -> str:
    return f"{param.opts[0] if param is not None else ''} {value}"


def _numbers(parts: list[str], where: str, example: str, *, count: int | None = None) -> list[float]:
    """The parts as finite numbers above 0."""
    import math

    if count is not None and len(parts) != count:
        raise InputError(Fault(where, f"{count} numbers are needed between colons, here are {len(parts)}", example))
    out = []
    for part in parts:
        try:
            number = float(part)
        except ValueError:
            raise InputError(Fault(where, f"{part!r} is not a number", example)) from None
        if not math.isfinite(number) or number <= 0:
            raise InputError(Fault(where, f"{part} is not above 0", example))
        out.append(number)
    return out


def weather_options(command: F) -> F:
    """What every question about a place can be asked with."""
    for option in (
        click.option("--seed", type=click.IntRange(0), default=1, show_default=True, help="Seed of everything drawn."),
        click.option("--years", type=click.IntRange(1, 500), default=50, show_default=True, help="Years to try."),
        click.option("--weather", metavar="SRC", help="climate, clear-sky, nasa-power, pvlib-data:NAME or a file."),
    ):
        command = option(command)
    return command


def output_options(rows: str) -> Callable[[F], F]:
    """Where the answer goes; ``rows``: what the CSV holds."""

    def with_options(command: F) -> F:
        for option in (
            click.option("--plot", type=OUT_FILE, metavar="FILE", help="Also draw it (.png, .svg or .pdf)."),
            click.option("--csv", type=OUT_FILE, metavar="FILE", help=f"Also write {rows}."),
            click.option("--json", "as_json", is_flag=True, help="Print one JSON document instead of text."),
        ):
            command = option(command)
        return command

    return with_options


def robot_options(rows: str) -> Callable[[F], F]:
    """What every question about a robot can be asked with: its file, another site, the weather, the outputs."""
    site = "Use this site instead of the robot file's."

    def with_options(command: F) -> F:
        command = weather_options(output_options(rows)(command))
        command = click.option("--site", type=ROBOT_OR_SITE_FILE, metavar="FILE", help=site)(command)
        return click.argument("robot", type=ROBOT_OR_SITE_FILE)(command)

    return with_options


@click.group(cls=Commands, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="sunbot")
def cli() -> None:
    """Will this solar panel, controller and battery carry this robot through the worst weeks of the place?

    Exit codes: 0 the target is met, 3 it is not, 2 the input is wrong, 130 interrupted.
    """


@cli.command()
@robot_options("the steps behind it")
@click.pass_context
def check(
    ctx: click.Context,
    robot: Path,
    site: Path | None,
    weather: str | None,
    years: int,
    seed: int,
    as_json: bool,
    csv: Path | None,
    plot: Path | None,
) -> None:
    """Does its panel keep the robot of ROBOT alive, how sure is that, and why not?"""
    from . import report, studies
    from .inputs import files_behind

    outputs = report.Outputs(as_json, csv, plot)
    filed = _robot(robot, site, weather)
    outputs.ready(files_behind(robot, site=site, weather=weather))
    with report.Progress(sys.stderr) as progress:
        result = studies.check(
            filed, years=years, seed=seed, trace=csv is not None or plot is not None, watcher=progress
        )
    click.echo(report.deliver_check(result, outputs, notes=_note), nl=False)
    ctx.exit(0 if result.met else TARGET_NOT_MET)


@cli.command()
@click.option("--watts", type=Sizes(), metavar="LOW:HIGH:STEP", help="Panels to try, e.g. 10:120:10 or 20,40,60.")
@click.option("--battery-ah", type=Range(), metavar="LOW:HIGH", help="Batteries to try, e.g. 5:60.")
@click.option("--controllers", is_flag=True, help="Compare direct, PWM and MPPT.")
@robot_options("the pairs of panel and battery tried")
@click.pass_context
def pick(
    ctx: click.Context,
    robot: Path,
    watts: list[float] | None,
    battery_ah: tuple[float, float] | None,
    controllers: bool,
    site: Path | None,
    weather: str | None,
    years: int,
    seed: int,
    as_json: bool,
    csv: Path | None,
    plot: Path | None,
) -> None:
    """Which panel, with which battery, is the smallest that keeps the robot of ROBOT alive?"""
    from . import report, studies
    from .inputs import files_behind

    outputs = report.Outputs(as_json, csv, plot)
    filed = _robot(robot, site, weather)
    outputs.ready(files_behind(robot, site=site, weather=weather))
    also = [name for name, asked in (("map", plot is not None), ("controllers", controllers)) if asked]
    with report.Progress(sys.stderr) as progress:
        result = studies.pick(
            filed, watts=watts, battery_ah=battery_ah, years=years, seed=seed, also=also, watcher=progress
        )
    click.echo(report.deliver_pick(result, outputs, notes=_note), nl=False)
    ctx.exit(0 if result.met else TARGET_NOT_MET)


@cli.command()
@robot_options("the steps of the worst fortnight")
@click.pass_context
def season(
    ctx: click.Context,
    robot: Path,
    site: Path | None,
    weather: str | None,
    years: int,
    seed: int,
    as_json: bool,
    csv: Path | None,
    plot: Path | None,
) -> None:
    """When is it darkest for the robot of ROBOT, how much work does each month afford, what would move the answer?"""
    from . import report, studies
    from .inputs import files_behind

    outputs = report.Outputs(as_json, csv, plot)
    filed = _robot(robot, site, weather)
    outputs.ready(files_behind(robot, site=site, weather=weather))
    with report.Progress(sys.stderr) as progress:
        result = studies.season(filed, years=years, seed=seed, watcher=progress)
    click.echo(report.deliver_season(result, outputs, notes=_note), nl=False)
    ctx.exit(0 if result.met else TARGET_NOT_MET)


@cli.command()
@click.argument("folder", type=click.Path(path_type=Path))
@click.option("--example", metavar="NAME", help="Copy this example instead.")
@click.option("--lat", "latitude", type=click.FloatRange(-90, 90), help="Degrees, north positive.")
@click.option("--lon", "longitude", type=click.FloatRange(-180, 180), help="Degrees, east positive.")
@click.option("--name", help="What people call the place.")
@click.option("--time-zone", metavar="ZONE", help="IANA name; left out, a fixed offset from the longitude.")
@click.option("--altitude-m", type=float, help="Above the sea; left out, from a coarse map.")
@click.option("--from-weather", metavar="FILE", help="Take the climate from this weather file.")
def new(folder: Path, example: str | None, **place: Any) -> None:
    """Start FOLDER with a commented site and robot file, for a place on land or from an example."""
    from .report import starter, starts

    start = starts.Start(**place)
    if example is not None:
        starts.refuse_beside_example(start)
        written = starter.copy_example(example, folder)
    else:
        written = starter.write_files(folder, starts.files_of(start, notes=_note))
    for path in written:
        click.echo(f"wrote {path}")
    click.echo(f"next: sunbot check {shlex.quote(str(folder / 'robot.toml'))}")


@cli.command()
@click.argument("site", type=ROBOT_OR_SITE_FILE)
@weather_options
@output_options("the weather behind it, step by step")
@click.pass_context
def sky(
    ctx: click.Context,
    site: Path,
    weather: str | None,
    years: int,
    seed: int,
    as_json: bool,
    csv: Path | None,
    plot: Path | None,
) -> None:
    """What does the place of SITE offer, and is the weather file believable?"""
    from . import report, studies
    from .inputs import files_behind, load_site

    outputs = report.Outputs(as_json, csv, plot)
    place = load_site(site)
    place = place if weather is None else _with_weather(place, weather)
    outputs.ready(files_behind(site, weather=weather))
    result = studies.survey(place, years=years, seed=seed)
    click.echo(report.deliver_sky(result, outputs, notes=_note), nl=False)
    ctx.exit(0 if result.met else TARGET_NOT_MET)


@cli.command()
@click.argument("what", type=click.Choice(["robot", "site"]))
def schema(what: str) -> None:
    """Print the JSON Schema of a file, so that editors complete and check it."""
    import json

    from .inputs import schema_of

    click.echo(json.dumps(schema_of("robot" if what == "robot" else "site"), indent=2))


def _robot(path: Path, site: Path | None, weather: str | None) -> Robot:
    from .inputs import load_robot

    robot = load_robot(path, site=site)
    return robot if weather is None else robot.model_copy(update={"site": _with_weather(robot.site, weather)})


def _with_weather(site: Site, source: str) -> Site:
    from .inputs import site_with_weather

    return site_with_weather(site, source)


def _note(text: str) -> None:
    click.echo(text, err=True)


def _interrupted(*_: Any) -> None:
    """Unwind, so that half files go; end by force where threads at work would hold the process up."""

    def end() -> None:
        click.echo(INTERRUPTED_NOTE, err=True)
        os._exit(INTERRUPTED)

    timer = threading.Timer(UNWOUND_S, end)
    timer.daemon = True
    timer.start()
    raise KeyboardInterrupt


def main() -> None:
    """Entry point of the ``sunbot`` command."""
    signal.signal(signal.SIGINT, _interrupted)
    try:
        cli(prog_name="sunbot")
    except OSError as error:
        if error.errno not in STDOUT_TROUBLE or error.filename is not None:
            raise
        _drop_stdout()
        with contextlib.suppress(OSError):
            reason = (error.strerror or str(error)).lower()
            click.echo(f"stdout: the answer cannot be written ({reason}). Write it to a place with room.", err=True)
        sys.exit(WrongInput.exit_code)
    except SystemExit as end:
        if end.code == INTERRUPTED:
            # Threads still at work would keep the process for as long as they last.
            sys.stderr.flush()
            os._exit(INTERRUPTED)
        raise


def _drop_stdout() -> None:
    """Nothing more can be written there; what waits is let go, or Python would complain again at its end."""
    with contextlib.suppress(OSError, ValueError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
