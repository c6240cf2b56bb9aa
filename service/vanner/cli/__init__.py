"""The command line."""

from vanner.cli.app import main

__all__ = ["main"]
