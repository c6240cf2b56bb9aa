"""The command line."""

from __future__ import annotations

import sys


def main() -> None:
    """Run the console command."""
    try:
        # Imported here, so that Ctrl-C while the libraries load gives no traceback either.
        from vanner.cli.app import run_app  # noqa: PLC0415 - see above
    except KeyboardInterrupt:
        sys.stderr.write("vanner: interrupted.\n")
        sys.exit(130)
    run_app()


__all__ = ["main"]
