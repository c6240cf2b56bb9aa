"""HTML simplified in one pass, so that parsing it takes time in proportion to its length.

A parser's work grows with the square of the nesting and of the attributes of a hostile
document. Text needs no attributes; comments, scripts and styles hold none; and what is still
too deep afterwards can be read without a tree.
"""

from __future__ import annotations

import functools
import html
import re
from collections import Counter

# A line break in the simplified document: no HTML holds this character for a purpose.
BREAK = "\x1e"
_DROPPED = {"script", "style", "noscript", "iframe", "noembed", "noframes"}
_BLOCKS = {
    "address", "article", "aside", "blockquote", "br", "caption", "center", "dd", "details",
    "dialog", "dir", "div", "dl", "dt", "fieldset", "figcaption", "figure", "footer", "form",
    "h1", "h2", "h3", "h4", "h5", "h6", "header", "hgroup", "hr", "legend", "li", "main",
    "menu", "nav", "ol", "option", "p", "pre", "search", "section", "summary", "td",
    "textarea", "th", "ul",
}  # fmt: skip
# Elements that hold nothing, or that the next of their kind or their parent's end closes.
_SHALLOW = {
    "area", "base", "br", "col", "dd", "dt", "embed", "hr", "img", "input", "li", "link",
    "meta", "option", "p", "param", "source", "tbody", "td", "tfoot", "th", "thead", "tr",
    "track", "wbr",
}  # fmt: skip
_MOST_TAGS = 300_000
_DEEPEST = 500
# A parser opens formatting elements anew in each block, at most three of each of 14 kinds.
_REOPENED = 42
_MOST_STEPS = 4_000_000

_ATTRIBUTES = r"""(?:[^>=]++|=\s*"[^"]*(?:"|\Z)|=\s*'[^']*(?:'|\Z)|=)*+"""
_TOKEN = re.compile(
    rf"""
    <!--(?:-?>|.*?(?:--!?>|\Z))
    | <(?P<raw>{"|".join(sorted(_DROPPED))}|title|textarea|xmp)(?=[\s/>]){_ATTRIBUTES}(?:>|\Z)
      (?P<inside>.*?)(?:</(?P=raw)(?=[\s/>])[^>]*(?:>|\Z)|\Z)
    | <(?P<end>/?)(?P<name>[a-zA-Z][^\s/>]*){_ATTRIBUTES}(?:>|\Z)
    | <[!?/][^>]*(?:>|\Z)
    """,
    re.DOTALL | re.IGNORECASE | re.VERBOSE,
)
_TAG = re.compile(r"<(/?)([a-z][^\s/>]*)>")
_ANY_TAG = re.compile(r"</?[a-z][^\s/>]*>")
_TITLE = re.compile(r"<title>(.*?)</title>", re.DOTALL)
_OUTSIDE_TEXT = re.compile(r"<(title|template|svg)>.*?(?:</\1>|\Z)", re.DOTALL)


def simplified(document: str) -> str:
    """The document without attributes, comments and scripts, names in lower case, and with
    a `BREAK` at each end of a block.

    Only the first 300,000 tags are read: a page of more is no piece of news, and its text
    is cut to far fewer words than stand between them.
    """
    if document.count("<") > _MOST_TAGS:
        document = "<".join(document.split("<", _MOST_TAGS + 1)[: _MOST_TAGS + 1])
    return _TOKEN.sub(_simpler, document)


def _simpler(token: re.Match[str]) -> str:
    raw, inside, end, name = token.group("raw", "inside", "end", "name")
    if name is not None:
        # No element has a longer name, and the cache must stay small.
        return _simpler_tag(end, name) if len(name) <= 20 else ""
    if raw is None or raw.lower() in _DROPPED:
        return ""
    inside = inside.replace("<", "&lt;")
    return f"<title>{inside}</title>" if raw.lower() == "title" else f"{BREAK}{inside}{BREAK}"


@functools.lru_cache(maxsize=512)
def _simpler_tag(end: str, name: str) -> str:
    name = name.lower()
    if not name.isalnum():
        # Names of other namespaces (`o:p`) say nothing of the text.
        return ""
    if name == "table":
        # A break within a table but outside its cells would be moved before it.
        return f"</table>{BREAK}" if end else f"{BREAK}<table>"
    if name not in _BLOCKS:
        return f"<{end}{name}>"
    return f"{BREAK}</{name}>" if end else f"<{name}>{BREAK}"


def is_heavy(simple: str) -> bool:
    """Whether a simplified document is nested too deeply, or too large for its depth."""
    tags = simple.count("<")
    if tags <= _DEEPEST:
        return False
    if tags * _REOPENED > _MOST_STEPS:
        return True
    unclosed: Counter[str] = Counter()
    depth = deepest = 0
    for end, name in _TAG.findall(simple):
        if name in _SHALLOW:
            continue
        if not end:
            unclosed[name] += 1
            depth += 1
            deepest = max(deepest, depth)
        elif unclosed[name]:
            unclosed[name] -= 1
            depth -= 1
    return deepest > _DEEPEST or (deepest + _REOPENED) * tags > _MOST_STEPS


def text_without_tree(simple: str) -> str:
    """The text of a simplified document, by taking the tags out of it."""
    return html.unescape(_ANY_TAG.sub("", _OUTSIDE_TEXT.sub("", simple)))


def title_without_tree(simple: str) -> str:
    """What the first title element of a simplified document holds, or ""."""
    found = _TITLE.search(simple)
    return html.unescape(found[1]) if found else ""
