"""Vanner: says what is new in a flow of text that nobody can read whole."""

from importlib.metadata import version

__version__ = version("vanner")
