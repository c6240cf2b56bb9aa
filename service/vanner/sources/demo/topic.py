"""What a routine topic is made of, and how its text blocks are read."""

from __future__ import annotations

import re
from dataclasses import dataclass

from vanner.sources.demo.grammar import entries

_ONLY_WITH = re.compile(r"(\d+)> (.*)")


@dataclass(frozen=True, slots=True)
class Opening:
    """How an item of a topic may begin.

    Attributes:
        headline: Template of the title.
        lead: Template of the first sentence.
        bodies: Templates of sentences that may follow, in any order.
    """

    headline: str
    lead: str
    bodies: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Topic:
    """A routine topic: the ways in which its items begin and go on."""

    openings: tuple[Opening, ...]


def topic(openings: str, bodies: str) -> Topic:
    """A topic from two text blocks.

    Args:
        openings: One `headline :: lead` a line.
        bodies: One template a line; `13> ` before it keeps it to the first and third opening.

    Raises:
        ValueError: An opening has no `::`.
    """
    found = []
    for number, entry in enumerate(entries(openings), start=1):
        headline, mark, lead = entry.partition(" :: ")
        if not mark:
            raise ValueError(f'"{entry}" is not "headline :: lead"')
        found.append(Opening(headline, lead, _fitting(entries(bodies), number)))
    return Topic(tuple(found))


def _fitting(bodies: tuple[str, ...], number: int) -> tuple[str, ...]:
    fitting = []
    for body in bodies:
        tagged = _ONLY_WITH.fullmatch(body)
        if tagged is None:
            fitting.append(body)
        elif str(number) in tagged[1]:
            fitting.append(tagged[2])
    return tuple(fitting)
