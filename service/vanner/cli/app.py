"""The `vanner` command: its parts, and how errors leave it.

Exit status: 0 done; 1 it failed; 2 wrong usage or settings; 3 the database cannot be used;
4 a daemon already serves the database; 5 an input cannot be read; 130 interrupted.
"""

from __future__ import annotations

import io
import os
import signal
import sys
from typing import Annotated, Protocol, runtime_checkable

import typer

from vanner import __version__
from vanner.cli import archives, database, demo, desk, rebuilding, serving, setup
from vanner.cli.console import warn
from vanner.errors import SettingsError, VannerError

app = typer.Typer(
    name="vanner",
    help="Watches a flow of text and says what is new in it.\n\n"
    "An alert is a lead, not a fact, and Vanner is no safety alarm.\n\n"
    "Example: vanner demo",
    epilog="Exit status: 0 done, 1 failed, 2 usage or settings, 3 database, "
    "4 already running, 5 input, 130 interrupted.",
    invoke_without_command=True,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,
    context_settings={"help_option_names": ["-h", "--help"]},
)
setup.add_to(app)
serving.add_to(app)
archives.add_to(app)
rebuilding.add_to(app)
demo.add_to(app)
desk.add_to(app)
app.add_typer(database.app, name="db")


def _version(wanted: bool) -> None:
    if wanted:
        sys.stdout.write(f"vanner {__version__}\n")
        raise typer.Exit


@app.callback()
def _options(
    context: typer.Context,
    version: Annotated[
        bool, typer.Option("--version", help="Print the version.", callback=_version, is_eager=True)
    ] = False,
) -> None:
    del version
    if context.invoked_subcommand is None:
        sys.stdout.write(context.get_help() + "\n")


@runtime_checkable
class _ArgumentsError(Protocol):
    """What the parser raises for wrong arguments: its class moved between releases of Typer."""

    exit_code: int

    def format_message(self) -> str:
        """What is wrong."""


def run_app() -> None:
    """Run the command of the arguments; every error becomes one sentence and an exit status."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            # A name or title that the terminal's encoding lacks is escaped and ends nothing.
            stream.reconfigure(errors="backslashreplace")
    try:
        status = app(prog_name="vanner", standalone_mode=False)
        sys.stdout.flush()
    except KeyboardInterrupt:
        status = 130
    except BrokenPipeError:
        status = 1
    except VannerError as error:
        status = _told(error)
    except Exception as error:
        # The last resort: users never see a traceback unless they ask for it.
        if os.environ.get("VANNER_TRACEBACK"):
            raise
        status = _usage(error) if isinstance(error, _ArgumentsError) else _bug(error)
    if status == 130:
        # A second Ctrl-C must not break into the ending.
        signal.signal(signal.SIGINT, signal.SIG_IGN)
        warn("vanner: interrupted; what was committed stands.")
    _let_go_of_output()
    sys.exit(status)


def _told(error: VannerError) -> int:
    warn(f"vanner: {error}")
    if isinstance(error, SettingsError):
        for fault in error.faults:
            warn(f"  {fault}")
    return error.exit_status


def _usage(error: _ArgumentsError) -> int:
    context = getattr(error, "ctx", None)
    command = context.command_path if context is not None else "vanner"
    told = " ".join(error.format_message().split()).rstrip(".")
    warn(f"vanner: {told}; see: {command} --help")
    return error.exit_code


def _bug(error: Exception) -> int:
    warn(
        f"vanner: An error that should not happen ({type(error).__name__}: {error}); "
        "set VANNER_TRACEBACK=1 and run it again to see where."
    )
    return 1


def _let_go_of_output() -> None:
    """Where the reader of our output has gone or its disk is full, nothing more can be said."""
    try:
        sys.stdout.flush()
    except OSError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
