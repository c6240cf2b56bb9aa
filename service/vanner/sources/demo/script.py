"""What a planted story is made of, and how its text block is read."""

from __future__ import annotations

from dataclasses import dataclass

from vanner.sources.demo.grammar import listed


@dataclass(frozen=True, slots=True)
class StoryItemText:
    """One item of a planted story: who carries it, its title and its text."""

    source: str
    title: str
    text: str


@dataclass(frozen=True, slots=True)
class StoryScript:
    """A planted story as written.

    Attributes:
        words: Its distinctive words, lower case, which the routine topics never use.
        span_h: Hours from the first item to the last.
        items: In order of appearance.
    """

    name: str
    desk: str
    words: tuple[str, ...]
    span_h: float
    items: tuple[StoryItemText, ...]


def script(name: str, desk: str, words: str, span_h: float, block: str) -> StoryScript:
    """A story from a text block: paragraphs whose first line is `source | title`.

    Raises:
        ValueError: A paragraph's first line has no bar.
    """
    items = []
    for paragraph in block.strip().split("\n\n"):
        first, _, rest = paragraph.strip().partition("\n")
        source, bar, title = first.partition("|")
        if not bar:
            raise ValueError(f'"{first}" of story "{name}" is not "source | title"')
        items.append(StoryItemText(source.strip(), title.strip(), " ".join(rest.split())))
    return StoryScript(name, desk, listed(words), span_h, tuple(items))
