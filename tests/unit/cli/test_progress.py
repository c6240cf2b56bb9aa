"""Progress: a bar on a terminal, plain lines elsewhere, results on stdout only."""

import re

import pytest

from vanner.cli.console import aligned, counted, printable, progress

CONTROL = re.compile(r"[\x00-\x09\x0b-\x1f\x7f]")


@pytest.mark.slow
def test_a_terminal_sees_a_bar_that_ends_full(terminal, town):
    status, drawn = terminal("replay", town[0], "-d", "try.db", columns=100)
    assert status == 0
    assert "\x1b[" in drawn
    assert "━" in drawn
    last = [line for line in re.split(r"[\r\n]", drawn) if "Reading" in line][-1]
    assert "684 of 684" in last
    taken = [line for line in re.split(r"[\r\n]", drawn) if "Taking in" in line][-1]
    assert "684 of 684" in taken


def test_elsewhere_progress_is_plain_lines_on_stderr(town):
    ended = town[2]
    assert CONTROL.search(ended.err + ended.out) is None
    lines = ended.err.splitlines()
    assert lines[0] == "Taking in: 684"
    assert lines[-1] == "Reading: 684 of 684"
    assert len(lines) <= 13
    assert all(re.fullmatch(r"Reading: [\d,]+ of 684", line) for line in lines[1:])
    assert "Reading" not in ended.out


def test_a_wish_for_colour_puts_no_control_characters_into_a_pipe(
    vanner, write_archive, few_lines, monkeypatch
):
    monkeypatch.setenv("FORCE_COLOR", "1")
    ended = vanner("replay", write_archive(few_lines), "-d", "try.db")
    assert (ended.status, ended.err.splitlines()[-1]) == (0, "Reading: 6 of 6")
    assert CONTROL.search(ended.err + ended.out) is None
    ended = vanner("db", "query", "-d", "try.db", "SELECT title FROM items")
    assert len(ended.out.splitlines()) == 7
    assert CONTROL.search(ended.out) is None


def test_plain_progress_tells_each_tenth_and_the_end(capsys):
    with progress("Reading", 50) as bar:
        for _ in range(50):
            bar(1)
    told = capsys.readouterr()
    assert told.out == ""
    assert told.err.splitlines() == [f"Reading: {n} of 50" for n in range(5, 51, 5)]


def test_plain_progress_without_a_known_end_tells_the_whole_at_last(capsys):
    with progress("Taking in", None) as bar:
        for _ in range(25):
            bar(1000)
    assert capsys.readouterr().err.splitlines() == [
        "Taking in: 10,000",
        "Taking in: 20,000",
        "Taking in: 25,000",
    ]


def test_plain_progress_over_nothing_says_nothing(capsys):
    with progress("Reading", 0):
        pass
    assert capsys.readouterr().err == ""


@pytest.mark.parametrize(
    ("number", "told"), [(0, "0 stories"), (1, "1 story"), (2500, "2,500 stories")]
)
def test_a_number_has_its_noun_in_the_right_form(number, told):
    assert counted(number, "story", "stories") == told


def test_columns_are_as_wide_as_their_widest_cell_on_the_screen():
    rows = [("海", "1", "x"), ("abc", "22", "")]
    assert list(aligned(rows, frozenset({1}))) == ["海    1  x", "abc  22"]


def test_control_characters_become_blanks():
    assert printable("a\x1b[1m\nb\u2028\x85c\tö") == "a [1m b  c ö"
