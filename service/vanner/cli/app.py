"""The `vanner` command: its parts, and how errors leave it.

Exit status: 0 done; 1 it failed; 2 wrong usage or settings; 3 the database cannot be used;
4 a daemon already serves the database; 5 an input cannot be read; 130 interrupted.
"""

from __future__ import annotations

import os
import sys
from typing import Annotated

import typer

from vanner import __version__
from vanner.cli import archives, database, demo, desk, serving, setup
from vanner.errors import SettingsError, VannerError

app = typer.Typer(
    name="vanner",
    help="Watches a flow of text and says what is new in it.\n\n"
    "An alert is a lead, not a fact, and Vanner is no safety alarm.",
    epilog="Exit status: 0 done, 1 failed, 2 usage or settings, 3 database, "
    "4 already running, 5 input, 130 interrupted.",
    no_args_is_help=True,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,
    context_settings={"help_option_names": ["-h", "--help"]},
)
setup.add_to(app)
serving.add_to(app)
archives.add_to(app)
demo.add_to(app)
desk.add_to(app)
app.add_typer(database.app, name="db")


def _version(wanted: bool) -> None:
    if wanted:
        sys.stdout.write(f"vanner {__version__}\n")
        raise typer.Exit


@app.callback()
def _options(
    version: Annotated[
        bool, typer.Option("--version", help="Print the version.", callback=_version, is_eager=True)
    ] = False,
) -> None:
    del version


def main() -> None:
    """Run the console command; every error becomes one sentence and an exit status."""
    try:
        app()
    except VannerError as error:
        _fail(error)
    except KeyboardInterrupt:
        sys.stderr.write("vanner: interrupted; what was committed stands.\n")
        sys.exit(130)
    except BrokenPipeError:
        # The reader of our output has gone: nothing more can be said to it.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        sys.exit(1)
    except Exception as error:
        # The last resort: users never see a traceback unless they ask for it.
        if os.environ.get("VANNER_TRACEBACK"):
            raise
        sys.stderr.write(
            f"vanner: an error that should not happen ({type(error).__name__}: {error}); "
            "set VANNER_TRACEBACK=1 and run it again to see where.\n"
        )
        sys.exit(1)


def _fail(error: VannerError) -> None:
    sys.stderr.write(f"vanner: {error}\n")
    if isinstance(error, SettingsError):
        for fault in error.faults:
            sys.stderr.write(f"  {fault}\n")
    sys.exit(error.exit_status)
