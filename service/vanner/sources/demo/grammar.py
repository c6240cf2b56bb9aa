"""A small generative grammar: templates with slots and alternatives become sentences.

In a template, `{ship}` draws from the word list of that name and stays the same within one
item; `{ship2}` is another ship; `{_ship}` is drawn afresh each time; `{person.last}` is the
last word of the item's person; `{num 3 40}` is a whole number; `[a|b]` is one of the two.
"""

from __future__ import annotations

import random
import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from itertools import accumulate

_TOKEN = re.compile(r"\{([^}]*)\}|\[([^\]]*)\]")
_ARTICLE = re.compile(r"\b([Aa]) (?=[aeio](?!ne\b|nce\b|u))")
# Tries at a value that the item does not hold yet; lists are long, so few are needed.
_REDRAWS = 20


def entries(block: str) -> tuple[str, ...]:
    """The entries of a text block: one a line, an indented line continuing the one above."""
    found: list[str] = []
    for line in block.strip("\n").splitlines():
        if not line.strip():
            continue
        if line[0].isspace() and found:
            found[-1] += " " + line.strip()
        else:
            found.append(line.strip())
    return tuple(found)


def listed(block: str) -> tuple[str, ...]:
    """The values of a comma-separated block, without the white space around them."""
    return tuple(value for value in (" ".join(part.split()) for part in block.split(",")) if value)


@dataclass(frozen=True, slots=True)
class WordList:
    """Values with cumulative weights that fall with the rank as Zipf's law has it."""

    values: tuple[str, ...]
    cumulative: tuple[float, ...]

    @classmethod
    def ranked(cls, values: tuple[str, ...]) -> WordList:
        """A list whose value at rank r weighs 1 / (r + one fifth of the list's length)."""
        flat = 1.0 + len(values) / 5
        return cls(values, tuple(accumulate(1.0 / (rank + flat) for rank in range(len(values)))))

    def draw(self, rng: random.Random) -> str:
        """One value by weight."""
        return rng.choices(self.values, cum_weights=self.cumulative)[0]


@dataclass(slots=True)
class Phrasing:
    """The wording of one item: expands templates and keeps what its slots stand for."""

    rng: random.Random
    lexicon: Mapping[str, WordList]
    held: dict[str, str] = field(default_factory=dict)

    def sentence(self, template: str) -> str:
        """The template in words, its first letter a capital.

        Raises:
            KeyError: The template names a slot that the lexicon does not have.
        """
        text = _ARTICLE.sub(r"\1n ", self._expand(template))
        return text[:1].upper() + text[1:]

    def _expand(self, template: str) -> str:
        return _TOKEN.sub(self._value, template)

    def _value(self, token: re.Match[str]) -> str:
        slot, options = token.groups()
        if slot is None:
            return self._expand(self.rng.choice(options.split("|")).strip())
        if slot.startswith("num "):
            _, low, high = slot.split()
            return str(self.rng.randint(int(low), int(high)))
        name, _, part = slot.partition(".")
        value = self._slot(name)
        return value.rsplit(" ", 1)[-1] if part == "last" else value

    def _slot(self, name: str) -> str:
        if name in self.held:
            return self.held[name]
        words = self.lexicon[name.lstrip("_").rstrip("0123456789")]
        if name.startswith("_"):
            return self._expand(words.draw(self.rng))
        value = ""
        # A second ship is another ship, unless the list is nearly used up.
        for _ in range(_REDRAWS):
            value = self._expand(words.draw(self.rng))
            if value not in self.held.values():
                break
        self.held[name] = value
        return value
