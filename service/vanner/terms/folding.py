"""Folds the spellings of a word into one term."""

from __future__ import annotations

from functools import lru_cache
from typing import Final
from unicodedata import category, normalize

MAX_TERM_LENGTH: Final = 64
"""Characters of the longest word that can be a term, before and after folding.

The longest compounds that people write, a label of a host name (63 by RFC 1035) and a SHA-256
digest in hexadecimal fit. What is longer is encoded data (Base64, keys, packed identifiers):
it would never be seen twice, and each would cost a row of the background for good.
"""

# Typographic and modifier-letter apostrophes; U+FF07 becomes one by NFKC. U+02BB and U+02BC
# are letters where they write a glottal stop, but the same names are written with ' as well.
_APOSTROPHES: Final = "\u2018\u2019\u02bb\u02bc"
# Default_Ignorable_Code_Point, Unicode 15.0: the soft hyphen, joiners, direction marks,
# variation selectors and fillers, which have no shape of their own.
_IGNORABLE: Final = (
    (0x00AD, 0x00AD), (0x034F, 0x034F), (0x061C, 0x061C), (0x115F, 0x1160), (0x17B4, 0x17B5),
    (0x180B, 0x180F), (0x200B, 0x200F), (0x202A, 0x202E), (0x2060, 0x206F), (0x3164, 0x3164),
    (0xFE00, 0xFE0F), (0xFEFF, 0xFEFF), (0xFFA0, 0xFFA0), (0xFFF0, 0xFFF8), (0x1BCA0, 0x1BCA3),
    (0x1D173, 0x1D17A), (0xE0000, 0xE0FFF),
)  # fmt: skip
_CHANGES: Final[dict[int, str | None]] = {
    **{code: None for first, last in _IGNORABLE for code in range(first, last + 1)},
    **dict.fromkeys(map(ord, _APOSTROPHES), "'"),
    # A few ligatures and spacing marks hold a space by NFKC; a term holds none.
    ord(" "): None,
}
# Words kept folded: a desk's vocabulary in daily use is some tens of thousands. With words of
# 64 characters at most this is about 10 MB.
_CACHED_WORDS: Final = 65_536


def fold(word: str) -> str:
    """Give all spellings of a word one form.

    Compatibility forms (NFKC), case (full case folding), invisible characters and the kinds
    of apostrophe are evened out; apostrophes at either end go. Accents stay. The order is that
    of the Unicode Standard's NFKC_Casefold: case folding of a normalised text, normalised once
    more because case folding may undo it. Folding a folded word changes nothing. A word of
    invisible characters or apostrophes only folds to the empty text.
    """
    if word.isascii():
        return word.lower().replace(" ", "").strip("'")
    folded = normalize("NFKC", word).casefold().translate(_CHANGES)
    return normalize("NFKC", folded).strip("'")


@lru_cache(maxsize=_CACHED_WORDS)
def _short_word_term(word: str) -> str | None:
    if not (word.isalpha() or any(category(character)[0] == "L" for character in word)):
        return None
    folded = fold(word)
    return folded if 0 < len(folded) <= MAX_TERM_LENGTH else None


def term_of(piece: str) -> str | None:
    """Return the term that `piece`, a word between two boundaries, stands for.

    None where it is no term: it holds no letter (General_Category L*), as spaces, punctuation
    and numbers do; it folds to nothing; or it is longer than `MAX_TERM_LENGTH`.
    """
    # Asked before the cache, so that a megabyte without a boundary is not kept in it.
    return _short_word_term(piece) if len(piece) <= MAX_TERM_LENGTH else None
