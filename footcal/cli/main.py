"""The `footcal` command: registers every command and turns errors into one line and an exit code."""

from __future__ import annotations

import os
import sys
from importlib import import_module
from typing import Annotated, Any

import typer

from footcal import __version__
from footcal.errors import FootcalError

COMMANDS = ("fit", "convert", "fuse", "score", "drift", "demo")

app = typer.Typer(
    name="footcal",
    help="Calibrate the force sensors in a legged robot's feet, and turn them into contact and ground reaction force.",
    epilog="No output of footcal is a safety function. Start with: footcal demo",
    no_args_is_help=True,
    rich_markup_mode="rich",
    pretty_exceptions_enable=False,
    add_completion=False,
    context_settings={"help_option_names": ["-h", "--help"]},
)


def _print_version(wanted: bool) -> None:
    if wanted:
        typer.echo(f"footcal {__version__}")
        raise typer.Exit


@app.callback()
def _options(
    _version: Annotated[
        bool, typer.Option("--version", callback=_print_version, is_eager=True, help="Print the version and leave.")
    ] = False,
) -> None:
    """Hold the options that stand before any command."""


for _name in COMMANDS:
    import_module(f"footcal.cli.{_name}").register(app)


def run(arguments: list[str] | None = None) -> None:
    """Run the command line; exits with 0 good, 1 action needed, 2 bad input or use, 3 device or stream failed.

    Args:
        arguments: as typed after `footcal`; None takes those of the process.
    """
    try:
        code: Any = app(args=arguments, standalone_mode=False)
    except FootcalError as error:
        sys.stderr.write(f"error: {error}\n")
        sys.exit(error.exit_code)
    except BrokenPipeError:
        _close_quietly()
        sys.exit(0)
    except SystemExit as stop:
        if isinstance(stop.__context__, BrokenPipeError):  # the library under typer has turned it into an exit
            _close_quietly()
            sys.exit(0)
        raise
    except typer.Abort:
        sys.stderr.write("stopped\n")
        sys.exit(130)
    except Exception as error:
        if not hasattr(error, "format_message"):  # not an error of use
            raise
        _show_use(error)
        sys.exit(2)
    sys.exit(code if isinstance(code, int) else 0)


def _show_use(error: Any) -> None:
    """Print what was wrong with the call, and how to see the right one."""
    path = error.ctx.command_path if getattr(error, "ctx", None) else "footcal"
    sys.stderr.write(f"error: {error.format_message()}\nSee: {path} --help\n")


def _close_quietly() -> None:
    """Keep the interpreter from complaining about a pipe whose reader has gone."""
    devnull = os.open(os.devnull, os.O_WRONLY)
    os.dup2(devnull, sys.stdout.fileno())
