"""Word boundaries and folding against the Unicode Character Database 15.0.

Source: Debian's package `unicode-data` 15.0.0-1, its files `auxiliary/WordBreakTest.txt`,
`DerivedNormalizationProps.txt` and `Scripts.txt`, which `tests/run` fetches.
"""

from __future__ import annotations

import os
import unicodedata
from collections.abc import Iterator
from itertools import chain
from pathlib import Path

import pytest

from vanner.terms.breaking import _RUN, break_uax29
from vanner.terms.folding import fold

# Rule WB3c keeps a zero-width joiner and an Extended_Pictographic character together. U+2701
# is one in Unicode 15.0 and no longer in the later version that the library is made from, so
# these two lines break before it, and no other line differs.
CHANGED_SINCE_15_0 = {
    "÷ 2701 × 200D × 2701 ÷": ["\u2701\u200d", "\u2701"],
    "÷ 0061 × 200D × 2701 ÷": ["a\u200d", "\u2701"],
}

UNSPACED_SCRIPTS = {"Han", "Hiragana", "Katakana", "Thai", "Lao", "Myanmar", "Khmer"}


def unicode_file(name: str) -> list[str]:
    """The lines of a file of the Unicode Character Database 15.0 without comments."""
    path = Path(os.environ.get("VANNER_TEST_DATA", ".cache/test-data"), "unicode", name)
    text = path.read_text(encoding="utf-8") if path.is_file() else ""
    # What differs from a library of a later version is known for this version only.
    if f"{path.stem}-15.0." not in text.partition("\n")[0]:
        reason = f"{path} of Unicode 15.0 is absent: tests/run fetches it on Debian 12"
        if os.environ.get("CI") == "true":
            pytest.fail(reason)
        pytest.skip(reason)
    lines = (raw.partition("#")[0].strip() for raw in text.splitlines())
    return [line for line in lines if line]


def pieces_of(line: str) -> list[str]:
    """The pieces that a line such as `÷ 0061 ÷ 0020 ÷` asks for."""
    parts = line.strip("÷ ").split("÷")
    return ["".join(chr(int(code, 16)) for code in part.split() if code != "×") for part in parts]


def properties(name: str) -> Iterator[tuple[int, list[str]]]:
    """Each code point of a property file with the fields after it."""
    for line in unicode_file(name):
        codes, *fields = (field.strip() for field in line.split(";"))
        first, _, last = codes.partition("..")
        for code in range(int(first, 16), int(last or first, 16) + 1):
            yield code, fields


def test_word_boundaries_are_those_of_uax_29() -> None:
    lines = unicode_file("WordBreakTest.txt")
    assert len(lines) == 1823
    found = {line: break_uax29("".join(pieces_of(line))) for line in lines}
    differ = {line: pieces for line, pieces in found.items() if pieces != pieces_of(line)}
    assert differ == CHANGED_SINCE_15_0


def test_folding_a_character_is_nfkc_casefold_but_for_spaces_and_apostrophes() -> None:
    mapped = {
        code: "".join(chr(int(part, 16)) for part in fields[1].split())
        for code, fields in properties("DerivedNormalizationProps.txt")
        if fields[0] == "NFKC_CF"
    }
    assert len(mapped) > 10_000
    apostrophes = dict.fromkeys(map(ord, "\u2018\u2019\u02bb\u02bc"), "'")
    # The planes in between hold no assigned character.
    for code in chain(range(0x40000), range(0xE0000, 0xE1000)):
        standard = mapped.get(code, chr(code))
        # A letter that this Python's own Unicode data does not know yet cannot be folded by it.
        if standard and unicodedata.category(chr(code)) == "Cn":
            continue
        expected = standard.replace(" ", "").translate(apostrophes).strip("'")
        assert fold(chr(code)) == unicodedata.normalize("NFKC", expected), hex(code)


def test_every_letter_of_a_script_without_spaces_is_broken_by_dictionary() -> None:
    scripts = {code: fields[0] for code, fields in properties("Scripts.txt")}
    assert set(scripts.values()) > UNSPACED_SCRIPTS
    for code, script in scripts.items():
        character = chr(code)
        # Letters new in 15.0 are unassigned to an older Python, and then no test can be made.
        if script in UNSPACED_SCRIPTS and unicodedata.category(character)[0] == "L":
            assert _RUN.fullmatch(character), hex(code)


def test_no_letter_of_another_script_is_broken_by_dictionary() -> None:
    scripts = {code: fields[0] for code, fields in properties("Scripts.txt")}
    # Common to several of those scripts: the closing mark and the kana's sound marks.
    shared = {0x3006, 0x30FC, 0xFF70, 0xFF9E, 0xFF9F}
    for code, script in scripts.items():
        character = chr(code)
        if _RUN.fullmatch(character) and unicodedata.category(character)[0] == "L":
            assert script in UNSPACED_SCRIPTS or code in shared, hex(code)
