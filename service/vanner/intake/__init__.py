"""Turns what a source gave into an item that may be accepted."""
