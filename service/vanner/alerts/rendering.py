"""Templates: one environment for each stage that has some, HTML always escaped."""

from __future__ import annotations

from functools import cache

from jinja2 import Environment, PackageLoader, StrictUndefined, select_autoescape

from vanner.alerts.lines import cut, padded, wrap


@cache
def environment(package: str) -> Environment:
    """The templates in a package's folder `templates`; what ends in `.html.j2` is escaped.

    A name that a template uses and nobody filled in is an error, never an empty space.
    """
    made = Environment(
        loader=PackageLoader(package),
        autoescape=select_autoescape(enabled_extensions=("html.j2",), default=False),
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    made.filters.update(cut=cut, padded=padded, wrapped=wrap)
    return made
