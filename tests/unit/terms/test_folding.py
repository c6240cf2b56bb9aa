"""Folding the spellings of a word."""

from __future__ import annotations

import unicodedata
from itertools import chain

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.terms.folding import fold, term_of


@settings(deadline=None)
@given(st.text(max_size=30))
def test_folding_a_folded_word_changes_nothing(word: str) -> None:
    assert fold(fold(word)) == fold(word)


def test_folding_each_character_twice_changes_nothing() -> None:
    # The planes in between hold no assigned character.
    for code in chain(range(0x40000), range(0xE0000, 0xE1000)):
        once = fold(chr(code))
        assert fold(once) == once, hex(code)


@settings(deadline=None)
@given(st.text(max_size=30))
def test_canonically_equal_words_fold_alike(word: str) -> None:
    assert fold(unicodedata.normalize("NFD", word)) == fold(unicodedata.normalize("NFC", word))


@settings(deadline=None)
@given(st.text(st.characters(codec="ascii"), max_size=30))
def test_case_makes_no_difference(word: str) -> None:
    assert fold(word.upper()) == fold(word.lower()) == fold(word)


@pytest.mark.parametrize(
    ("word", "folded"),
    [
        ("STRASSE", "strasse"),
        ("Straße", "strasse"),
        ("ΟΔΟΣ", "οδοσ"),
        ("οδός", "οδόσ"),
        ("ﬁn", "fin"),
        ("Ｐｉｅｒ", "pier"),
        ("ŉ", "n"),
        ("Hawai\u02bbi", "hawai'i"),
        ("co\u00adop", "coop"),
        ("\u3164", ""),
        ("\u02bc", ""),
        ("'", ""),
        ("", ""),
    ],
)
def test_spellings_fold_to(word: str, folded: str) -> None:
    assert fold(word) == folded


@pytest.mark.parametrize(
    "piece", ["", " ", "12", "1.5", "_", "'", "\u0301", "Ⅷ", "™", "\u3164", "\u02bc"]
)
def test_what_has_no_letter_or_folds_to_nothing_is_no_term(piece: str) -> None:
    assert term_of(piece) is None
