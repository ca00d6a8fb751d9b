"""The command line: options in, exit codes out."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from . import __version__
from .errors import Fault, InputError

if TYPE_CHECKING:
    from .inputs import Robot, Site

F = TypeVar("F", bound=Callable[..., Any])

TARGET_NOT_MET = 3
INTERRUPTED = 130
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
        except InputError as error:
            raise WrongInput(str(error)) from error
        except KeyboardInterrupt as error:
            click.echo("\nInterrupted: nothing was written.", err=True)
            raise click.exceptions.Exit(INTERRUPTED) from error


def weather_options(command: F) -> F:
    """What every question about a place can be asked with."""
    for option in (
        click.option("--seed", type=click.IntRange(0), default=1, show_default=True, help="Seed of everything drawn."),
        click.option("--years", type=click.IntRange(1, 500), default=50, show_default=True, help="Years to try."),
        click.option("--weather", metavar="SRC", help="climate, clear-sky, nasa-power, pvlib-data:NAME or a file."),
    ):
        command = option(command)
    return command


def output_options(command: F) -> F:
    """Where the answer goes."""
    for option in (
        click.option("--plot", type=OUT_FILE, metavar="FILE", help="Also draw it (.png, .svg or .pdf)."),
        click.option("--csv", type=OUT_FILE, metavar="FILE", help="Also write the steps behind it."),
        click.option("--json", "as_json", is_flag=True, help="Print one JSON document instead of text."),
    ):
        command = option(command)
    return command


@click.group(cls=Commands, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="sunbot")
def cli() -> None:
    """Will this solar panel, controller and battery carry this robot through the worst weeks of the place?

    Exit codes: 0 the target is met, 3 it is not, 2 the input is wrong, 130 interrupted.
    """


@cli.command()
@click.argument("robot", type=ROBOT_OR_SITE_FILE)
@click.option("--site", type=ROBOT_OR_SITE_FILE, metavar="FILE", help="Use this site instead of the robot file's.")
@weather_options
@output_options
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

    outputs = report.Outputs(as_json, csv, plot)
    outputs.ready()
    filed = _robot(robot, site, weather)
    result = studies.check(filed, years=years, seed=seed, trace=csv is not None or plot is not None)
    click.echo(report.deliver_check(result, outputs, notes=_note), nl=False)
    ctx.exit(0 if result.met else TARGET_NOT_MET)


@cli.command()
@click.argument("folder", type=click.Path(path_type=Path))
@click.option("--example", metavar="NAME", help="Copy this example.")
def new(folder: Path, example: str | None) -> None:
    """Start FOLDER with a commented site and robot file."""
    from .report import starter

    if example is None:
        raise InputError(
            Fault("sunbot new", "no start is named", f"--example and one of {', '.join(starter.example_names())}")
        )
    for path in starter.copy_example(example, folder):
        click.echo(f"wrote {path}")


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


def main() -> None:
    """Entry point of the ``sunbot`` command."""
    cli(prog_name="sunbot")
