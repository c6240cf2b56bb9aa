"""Text as it may be kept."""

import sys
import unicodedata

import pytest

from vanner.intake.clean import _long_run_of_marks, clean_line, clean_text

MOST = 1_000_000


@pytest.mark.parametrize(
    ("found", "kept"),
    [
        ("e\u0301", "é"),
        ("a\0b\x07c\x7fd\x9fe", "abcde"),
        ("a\r\nb\rc\vd\fe\x85f\u2028g\u2029h", "a\nb\nc\nd\ne\nf\ng\nh"),
        ("a\tb", "a b"),
        ("\ufeffa\ufeffb", "ab"),
        ("gate \u202etuhs\u202c \u2066now\u2069", "gate tuhs now"),
        ("a\ud800b\udc80c", "abc"),
        ("e\0\u0301", "é"),
        ("می\u200cخواهم क्\u200dष \u200eab\u200f", "می\u200cخواهم क्\u200dष \u200eab\u200f"),
        ("  \n a \n ", "a"),
        ("", ""),
        ("😀 plain", "😀 plain"),
    ],
)
def test_characters_that_disguise_or_cannot_be_stored_are_taken_out(found, kept):
    assert clean_text(found, MOST) == kept


@pytest.mark.parametrize(("character", "size"), [("a", 1), ("é", 2), ("橋", 3), ("😀", 4)])
def test_text_is_cut_at_a_character_within_the_bytes(character, size):
    cut = clean_text(character * 1000, 101)
    assert cut == character * (101 // size)


def test_text_of_just_the_bytes_is_kept_whole():
    assert clean_text("é" * 50, 100) == "é" * 50


def test_what_stands_before_a_long_text_does_not_count_against_it():
    assert clean_text("\0" * 1000 + " " * 1000 + "abc", 3) == "abc"


def test_a_line_has_single_spaces_and_at_most_so_many_characters():
    assert clean_line(" a\n\tb \u3000 c ", 100) == "a b c"
    assert clean_line("ab cd", 3) == "ab"
    assert clean_line("é" * 2000, 1000) == "é" * 1000


@pytest.mark.parametrize(
    "marks", ["\u0301" * 400_000 + "\u0323" * 400_000, "\u0f73" * 400_000, "\u0323\u0301" * 400_000]
)
def test_runs_of_marks_are_cut_to_thirty_before_they_are_ordered(marks):
    # In full, ordering these takes hours: the work grows with the square of the run.
    kept = clean_text("x" + marks + "y", MOST)
    assert kept[0] == "x"
    assert kept[-1] == "y"
    assert len(kept) <= 62
    assert unicodedata.is_normalized("NFC", kept)


def test_every_combining_mark_of_unicode_is_counted_in_a_run():
    run = _long_run_of_marks()
    missed = [
        code
        for code in range(sys.maxunicode + 1)
        if unicodedata.combining(chr(code)) and not run.fullmatch(chr(code) * 31)
    ]
    assert missed == []
    assert run.search("ab" * 100) is None
