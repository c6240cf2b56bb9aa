"""Cutting text into terms with their places, and counting them."""

from __future__ import annotations

from collections import Counter

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.terms import Span, count_terms, cut
from vanner.terms.breaking import break_text
from vanner.terms.folding import MAX_TERM_LENGTH, fold

# Every kind of character that breaking or folding treats in a way of its own, so that random
# texts of them meet at the seams.
AWKWARD = (
    "abSXZ09 ._-:,\t\n'\u2018\u2019\u02bb\u02bc\uff07"
    "\u00ad\u200b\u200d\u200c\ufe0f\u2060\u0301\u0308"
    "éßſİıŉǅΣςﬁﬃＡ１㎏Ⅷ™²ﷺ\u037a\u1e9e"
    "今東京々〇ーのをアｱｶﾞﾊﾟ\u3099"
    "กำไทย์๑ลาວ໑ខ្ញុំ១မြန်မာ၁\u17b4"
    "한국어\u1100\u1161\u11a8\u3164שלום״مرحبا"
    "😀👩\u200d🔬🇦🇧🏽𠀀𐐀\U000e0100\ud800\udfff\x00"
)
TEXTS = st.one_of(st.text(AWKWARD, max_size=60), st.text(max_size=60))


def terms(text: str) -> list[str]:
    return [span.term for span in cut(text)]


@settings(deadline=None)
@given(TEXTS)
def test_each_span_holds_the_word_that_folds_to_its_term(text: str) -> None:
    for span in cut(text):
        assert fold(text[span.start : span.end]) == span.term


@settings(deadline=None)
@given(TEXTS)
def test_spans_ascend_without_overlap_inside_the_text(text: str) -> None:
    end_before = 0
    for span in cut(text):
        assert end_before <= span.start < span.end <= len(text)
        end_before = span.end


@settings(deadline=None)
@given(TEXTS, TEXTS)
def test_counting_equals_counting_the_cut_terms_in_order(title: str, text: str) -> None:
    expected = Counter(terms(title) + terms(text))
    assert list(count_terms(title, text).items()) == list(expected.items())


def test_counting_equals_counting_the_cut_terms_for_every_character() -> None:
    for first in range(0, 0x40000, 0x1000):
        text = " ".join(map(chr, range(first, first + 0x1000)))
        assert count_terms("", text) == Counter(terms(text))


@settings(deadline=None)
@given(TEXTS)
def test_breaking_loses_no_character(text: str) -> None:
    pieces = break_text(text)
    assert all(pieces)
    whole = "".join(pieces)
    assert len(whole) == len(text)
    assert all(
        got == wanted or ("\ud800" <= wanted <= "\udfff" and got == "\ufffd")
        for got, wanted in zip(whole, text, strict=True)
    )


@settings(deadline=None)
@given(TEXTS)
def test_a_term_is_short_and_holds_no_space(text: str) -> None:
    for term in terms(text):
        assert 1 <= len(term) <= MAX_TERM_LENGTH
        assert " " not in term


@pytest.mark.parametrize(
    "text", ["", " ", "\n\t", "...", "2024", "3.14 12:30 1,000", "😀👍🏽", "\ud800"]
)
def test_text_without_letters_has_no_terms(text: str) -> None:
    assert cut(text) == []
    assert count_terms(text, text) == {}


def test_a_word_with_letters_and_digits_is_a_term() -> None:
    assert terms("the 3rd of 12 on B52") == ["the", "3rd", "of", "on", "b52"]


def test_title_and_text_are_counted_together_title_first() -> None:
    counts = count_terms("Ferry late", "The ferry was late. Ferry!")
    assert list(counts.items()) == [("ferry", 3), ("late", 2), ("the", 1), ("was", 1)]


def test_a_word_does_not_reach_from_the_title_into_the_text() -> None:
    assert count_terms("har", "bour") == {"har": 1, "bour": 1}


@pytest.mark.parametrize("apostrophe", ["'", "\u2019", "\u2018", "\u02bc", "\uff07"])
def test_both_spellings_of_a_contraction_are_one_term(apostrophe: str) -> None:
    assert cut(f"They can{apostrophe}t sail") == [
        Span("they", 0, 4),
        Span("can't", 5, 10),
        Span("sail", 11, 15),
    ]


@pytest.mark.parametrize("quoted", ["'tide'", "\u2018tide\u2019", "\u02bctide\u02bc", "tide\u02bc"])
def test_quotation_marks_round_a_word_are_no_part_of_its_term(quoted: str) -> None:
    assert terms(f"the {quoted} turns") == ["the", "tide", "turns"]


def test_places_count_characters_of_the_original_where_folding_changes_lengths() -> None:
    text = "Straße ﬁsh Ｐｉｅｒ 𐐀 end"
    assert cut(text) == [
        Span("strasse", 0, 6),
        Span("fish", 7, 10),
        Span("pier", 11, 15),
        Span("𐐨", 16, 17),
        Span("end", 18, 21),
    ]


def test_emoji_before_a_word_do_not_move_its_place() -> None:
    text = "👩\u200d🔬👍🏽🇦🇧 quay 😀crane"
    assert [text[start:end] for _, start, end in cut(text)] == ["quay", "crane"]


def test_a_combining_mark_stays_with_its_word_and_composes() -> None:
    assert cut("cafe\u0301 bar") == [Span("café", 0, 5), Span("bar", 6, 9)]
    assert terms("cafe\u0301") == terms("CAFÉ")


def test_a_soft_hyphen_does_not_part_a_word() -> None:
    assert terms("har\u00adbour") == ["harbour"]


# The sentences are made up here. Where their words end was judged with the dictionaries that
# are under test at hand, so these hold the dictionaries' use, not their quality.
@pytest.mark.parametrize(
    ("text", "expected"),
    [
        pytest.param(
            "東京の天気は雨です。", ["東京", "の", "天気", "は", "雨", "です"], id="japanese"
        ),
        pytest.param("カタカナのテスト", ["カタカナ", "の", "テスト"], id="katakana"),
        pytest.param("我们今天去公园散步。", ["我们", "今天", "去", "公园", "散步"], id="chinese"),
        pytest.param("ไปโรงเรียนทุกวัน", ["ไป", "โรงเรียน", "ทุก", "วัน"], id="thai"),
        pytest.param("ខ្ញុំចូលចិត្តអានសៀវភៅ", ["ខ្ញុំ", "ចូលចិត្ត", "អាន", "សៀវភៅ"], id="khmer"),
        pytest.param("ຂ້ອຍມັກກິນເຂົ້າ", ["ຂ້ອຍ", "ມັກ", "ກິນເຂົ້າ"], id="lao"),
        pytest.param("ကျွန်တော်စာအုပ်ဖတ်တယ်", ["ကျွန်တော်", "စာအုပ်", "ဖတ်", "တယ်"], id="burmese"),
    ],
)
def test_writing_without_spaces_is_broken_by_dictionary(text: str, expected: list[str]) -> None:
    assert terms(text) == expected


def test_dictionary_words_keep_their_places_after_characters_beyond_the_bmp() -> None:
    text = "😀𠀀 東京 ไปโรงเรียน quay"
    assert [(text[start:end], term) for term, start, end in cut(text)] == [
        ("𠀀", "𠀀"),
        ("東京", "東京"),
        ("ไป", "ไป"),
        ("โรงเรียน", "โรงเรียน"),
        ("quay", "quay"),
    ]


def test_a_latin_word_among_ideographs_is_the_term_that_it_is_elsewhere() -> None:
    assert "host:port's" in terms("今日はHost:Port’s東京")
    assert terms("Host:Port’s") == ["host:port's"]


def test_half_width_and_full_width_kana_are_one_term() -> None:
    assert count_terms("ｶﾞｿﾘﾝ", "ガソリン") == {"ガソリン": 2}


def test_hangul_is_parted_by_its_spaces() -> None:
    assert terms("항구에 배가 왔다") == ["항구에", "배가", "왔다"]


@pytest.mark.parametrize("letter", ["x", "é"])
def test_the_longest_word_is_a_term_and_a_longer_one_is_none(letter: str) -> None:
    longest = letter * MAX_TERM_LENGTH
    assert terms(f"a {longest} b") == ["a", longest, "b"]
    assert terms(f"a {longest}{letter} b") == ["a", "b"]


def test_a_word_that_folding_makes_too_long_is_no_term() -> None:
    assert terms("ﬃ" * 21) == ["ffi" * 21]
    assert terms("ﬃ" * 22) == []
