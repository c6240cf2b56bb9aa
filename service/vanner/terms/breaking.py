"""Finds where words begin and end.

Text is broken by the default word boundaries of UAX #29. Those give single letters in the
scripts that write words without spaces between them, so runs of such letters are broken by
ICU's dictionaries instead. Only the runs go there: a Latin word in a Japanese sentence is the
same term as it is anywhere else.
"""

from __future__ import annotations

import re
from typing import Final

from icu4py.breakers import WordBreaker
from unicode_segmentation_rs import split_word_bounds, unicode_words

# The letters (and the letter-like numerals and marks among them) whose Script property is Han,
# Hiragana, Katakana, Thai, Lao, Myanmar or Khmer, and the letters that several of them share:
# the closing mark U+3006, the prolonged sound marks U+30FC and U+FF70 and the half-width voiced
# ones. Digits and punctuation of those scripts are left to UAX #29.
_UNSPACED: Final = (
    "\u0e01-\u0e3a\u0e40-\u0e4e"  # Thai
    "\u0e81-\u0ecd\u0ece\u0edc-\u0edf"  # Lao
    "\u1000-\u103f\u1050-\u108f\u109a-\u109d\ua9e0-\ua9ef\ua9fa-\ua9fe\uaa60-\uaa7f"  # Myanmar
    "\u1780-\u17d3\u17d7\u17dc\u17dd"  # Khmer
    "\u3005-\u3007\u3021-\u3029\u3038-\u303b"  # Han: iteration mark, zero, numerals
    "\u3041-\u3096\u3099\u309a\u309d-\u309f\u30a1-\u30fa\u30fc-\u30ff\u31f0-\u31ff"  # kana
    "\uff66-\uff9f"  # half-width kana
    "\u3400-\u4dbf\u4e00-\u9fff\uf900-\ufad9"  # Han
    "\U00016fe2\U00016fe3\U00016ff0\U00016ff1"  # Han: marks of older writing
    "\U0001aff0-\U0001afff\U0001b000-\U0001b167"  # archaic and small kana
    "\U00020000-\U0003ffff"  # Han: the supplementary and the tertiary ideographic plane
)
# What may stand inside a run without ending it: joiners, variation selectors and the general
# combining marks, all of which belong to the letter before them.
_ATTACHED: Final = "\u0300-\u036f\u200c\u200d\u2060\ufe00-\ufe0f\U000e0100-\U000e01ef"
_RUN: Final = re.compile(f"[{_UNSPACED}][{_UNSPACED}{_ATTACHED}]*")
# Asked first because it is several times cheaper for Latin text: false for nothing that `_RUN`
# would find, and for some other texts (emoji, Hangul) true as well.
_PERHAPS_RUN: Final = re.compile("[^\u0000-\u0e00\u1800-\u3004]")

# A lone surrogate is no character and neither library takes one.
_LONE_SURROGATE: Final = re.compile("[\ud800-\udfff]")


def break_uax29(text: str) -> list[str]:
    """Break `text` at the default word boundaries of UAX #29.

    The pieces are words, spaces and punctuation alike, and joined they are `text` again, so a
    piece's place follows from the lengths of those before it, in code points. (The library's
    own indices are not used: they count UTF-8 bytes.) Empty text has no pieces.
    """
    try:
        return split_word_bounds(text)
    except UnicodeEncodeError:
        return split_word_bounds(_LONE_SURROGATE.sub("\ufffd", text))


def break_text(text: str) -> list[str]:
    """Break `text` into words and what is between them.

    As `break_uax29`, but for runs of Han, Hiragana, Katakana, Thai, Lao, Myanmar or Khmer
    letters, which ICU's dictionaries break. The pieces are as long together as `text`, and are
    `text` again when joined, but for lone surrogates, which become U+FFFD.
    """
    if _PERHAPS_RUN.search(text) is None:
        return break_uax29(text)
    pieces: list[str] = []
    done = 0
    for run in _RUN.finditer(text):
        if run.start() > done:
            pieces += break_uax29(text[done : run.start()])
        # Iterating gives the pieces themselves; the breaker's indices count UTF-16 units. The
        # dictionaries are chosen by script, so the locale need not be known.
        pieces += WordBreaker(run[0], "und")
        done = run.end()
    if done < len(text):
        pieces += break_uax29(text[done:])
    return pieces


def find_words(text: str) -> list[str]:
    """Find the pieces of `break_text` that can be words, in their order.

    At least those with a letter are there; spaces and punctuation are mostly left out, which
    makes this the faster one where places are not needed.
    """
    if _PERHAPS_RUN.search(text) is not None:
        return break_text(text)
    try:
        return unicode_words(text)
    except UnicodeEncodeError:
        return break_text(text)
