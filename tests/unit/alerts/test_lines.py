"""Untrusted text in lines of a known width."""

import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from vanner.alerts.lines import cells, cut, one_line, padded, wrap

ANY_TEXT = st.text(st.characters(exclude_categories=[]), max_size=120)


def test_line_breaks_tabs_and_control_characters_become_single_spaces():
    assert one_line("Fire\r\nat\tthe\x00 mill\u2028 now\x85 ") == "Fire at the mill now"


def test_marks_that_reorder_text_are_taken_out():
    assert one_line("invoice\u202egpj.exe \u2067x\u2069") == "invoicegpj.exe x"


def test_a_lone_surrogate_becomes_the_replacement_character():
    assert one_line("a\ud800b") == "a\ufffdb"


def test_joiners_within_words_are_kept():
    assert one_line("می\u200cخواهم") == "می\u200cخواهم"


@pytest.mark.parametrize(
    ("text", "width"), [("abc", 3), ("港の", 4), ("e\u0301", 1), ("", 0), ("a\u200db", 2)]
)
def test_wide_characters_take_two_cells_and_combining_ones_none(text, width):
    assert cells(text) == width


def test_a_text_that_fits_is_not_cut():
    assert cut("exactly ten", 11) == "exactly ten"


def test_a_text_that_does_not_fit_ends_in_an_ellipsis():
    assert cut("exactly eleven", 11) == "exactly el…"
    assert cut("exactly eleven", 9) == "exactly…"
    assert cut("港の工場で", 6) == "港の…"


def test_padding_fills_up_by_cells_and_not_by_characters():
    assert padded("港", 4) == "港  "
    assert padded("harbour", 4) == "har…"


def test_text_is_broken_at_spaces_and_hangs_under_its_first_line():
    assert wrap("one two three four", "1. ", "   ", width=10) == "1. one two\n   three\n   four"


def test_a_word_longer_than_a_line_is_broken_within():
    assert wrap("abcdefghij", width=4) == "abcd\nefgh\nij"


def test_the_last_line_allowed_is_cut():
    assert wrap("one two three four five", width=9, most=2) == "one two\nthree fo…"


def test_wrapping_ends_even_where_no_character_fits():
    assert wrap("港の", width=1) == "港\nの"


@given(ANY_TEXT, st.integers(8, 40), st.sampled_from([None, 1, 3]))
def test_no_line_is_wider_than_allowed_and_none_is_lost(text, width, most):
    lines = wrap(text, "- ", "  ", width=width, most=most).split("\n")
    assert all(cells(line) <= width for line in lines)
    assert most is None or len(lines) <= most
    if most is None:
        whole = "".join(line[2:] for line in lines)
        assert whole.replace(" ", "") == one_line(text).replace(" ", "")


@given(ANY_TEXT)
def test_one_line_is_one_line_encodable_and_final(text):
    line = one_line(text)
    assert len(line.splitlines()) <= 1
    assert not any(unicodedata.category(character) in ("Cc", "Cs") for character in line)
    assert one_line(line) == line
