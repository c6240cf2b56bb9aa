"""Turns what a source gave into an item that may be accepted."""

from vanner.intake.item import take_in

__all__ = ["take_in"]
