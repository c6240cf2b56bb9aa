"""HTML as text."""

from __future__ import annotations

from typing import NamedTuple

from selectolax.lexbor import LexborHTMLParser

from vanner.intake.markup import BREAK, is_heavy, simplified, text_without_tree, title_without_tree


class Page(NamedTuple):
    """What a page says: its title (title or first h1 element, or "") and its text."""

    title: str
    text: str


def read_page(document: str) -> Page:
    """Title and text of an HTML document or fragment, a line for each block.

    White space is single spaces, empty lines are left out; scripts, styles and templates
    give nothing. A heading that serves as the title is not repeated in the text. A document
    that is nested beyond reason is read without its structure, and so without its headings.
    """
    if "<" not in document and "&" not in document:
        return Page("", _tidy(document))
    simple = simplified(document)
    if is_heavy(simple):
        return Page(_line(title_without_tree(simple)), _tidy(text_without_tree(simple)))
    tree = LexborHTMLParser(simple)
    tree.strip_tags(["template", "svg"])
    title = _title(tree)
    text = "" if tree.body is None else tree.body.text(deep=True)
    return Page(title, _tidy(text))


def _title(tree: LexborHTMLParser) -> str:
    """The page's title, whose element is taken out of the tree."""
    titles = list(tree.css("title"))
    title = _line(titles[0].text(deep=True)) if titles else ""
    for element in titles:
        element.decompose()
    heading = None if title else tree.css_first("h1")
    if heading is not None:
        title = _line(heading.text(deep=True))
        heading.decompose()
    return title


def _line(text: str) -> str:
    return " ".join(text.replace(BREAK, " ").split())


def _tidy(text: str) -> str:
    lines = (" ".join(line.split()) for line in text.split(BREAK))
    return "\n".join(line for line in lines if line)
