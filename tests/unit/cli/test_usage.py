"""Help, version and wrong usage."""

import pytest

from vanner import __version__

COMMANDS = ("init", "check", "run", "replay", "import", "rebuild", "demo", "status", "digest")
ALL = [(name,) for name in COMMANDS] + [("db", name) for name in ("upgrade", "query", "backup")]


@pytest.mark.parametrize("words", [(), ("db",), *ALL], ids=" ".join)
def test_help_of_a_command_says_what_it_does_and_gives_an_example(vanner, words):
    ended = vanner(*words, "--help")
    assert (ended.status, ended.err) == (0, "")
    told, _, rest = ended.out.partition("Example: ")
    # Between the usage line and the example there is at least one whole sentence.
    assert told.rstrip().endswith(".")
    assert rest.startswith(" ".join(["vanner", *words]))
    assert max(map(len, ended.out.splitlines())) <= 80


@pytest.mark.parametrize("words", [name for name in ALL if name[0] != "run"], ids=" ".join)
def test_the_example_of_a_command_has_only_options_that_it_knows(vanner, words):
    told = vanner(*words, "-h").out
    example = told.partition("Example: ")[2].partition("\n\n")[0]
    options = [word for word in example.split() if word.startswith("--")]
    assert [option for option in options if f"{option} " not in told.partition("Options:")[2]] == []


@pytest.mark.parametrize("words", [(), ("db",)], ids=["vanner", "vanner db"])
def test_without_a_command_the_help_is_shown_whole(vanner, words):
    ended = vanner(*words)
    assert (ended.status, ended.err) == (0, "")
    assert ended.out == vanner(*words, "--help").out


def test_the_overview_names_every_command_and_cuts_none_of_its_sentences(vanner):
    told = vanner("--help").out.partition("Commands:")[2].partition("Exit status")[0]
    named = [row.split() for row in told.strip().splitlines()]
    assert [words[0] for words in named] == [*COMMANDS, "db"]
    assert all(words[-1].endswith(".") and not words[-1].endswith("..") for words in named)


@pytest.mark.slow
def test_version_is_printed_by_a_real_process(process):
    ended = process("--version")
    assert (ended.status, ended.out, ended.err) == (0, f"vanner {__version__}\n", "")


WRONG = {
    "an unknown command": (["dance"], "dance", "vanner"),
    "an unknown option": (["replay", "--dance"], "--dance", "vanner replay"),
    "a missing argument": (["replay", "-d", "a.db"], "ARCHIVE", "vanner replay"),
    "a missing option": (["rebuild"], "--into", "vanner rebuild"),
    "a word for a number": (["replay", "a", "-d", "b", "-n", "x"], "-n", "vanner replay"),
    "a budget of nothing": (["replay", "a", "-d", "b", "-n", "0"], "-n", "vanner replay"),
    "an unknown form": (["db", "query", "x", "-f", "xml"], "xml", "vanner db query"),
    "one argument too many": (["status", "extra"], "extra", "vanner status"),
    "an unknown db command": (["db", "dance"], "dance", "vanner db"),
}


@pytest.mark.parametrize("case", WRONG)
def test_wrong_usage_is_one_sentence_that_points_to_the_help(vanner, case):
    arguments, named, command = WRONG[case]
    ended = vanner(*arguments)
    assert (ended.status, ended.out) == (2, "")
    assert ended.err.startswith("vanner: ")
    assert ended.err.endswith(f"; see: {command} --help\n")
    assert ended.err.count("\n") == 1
    assert named in ended.err


@pytest.mark.slow
def test_wrong_usage_of_a_real_process_exits_with_two(process):
    ended = process("replay")
    assert (ended.status, ended.out) == (2, "")
    assert ended.err == "vanner: Missing argument 'ARCHIVE'; see: vanner replay --help\n"
