"""The folder: which files are taken, when, and where they end up."""

import gzip
import json
import os
from pathlib import Path

import pytest
from structlog.testing import capture_logs

from vanner.errors import SourceError
from vanner.settings import FolderSettings
from vanner.sources.folder import FolderSource

NOW_S = 1_700_000_000.0


@pytest.fixture
def inbox(tmp_path):
    return tmp_path / "in"


def source_of(inbox: Path, **options) -> FolderSource:
    settings = FolderSettings(
        name="drop", kind="folder", path=inbox, language=options.pop("language", None)
    )
    return FolderSource(settings, **options)


def drop(
    inbox: Path, name: str, data: bytes | str = "Gate\nThe gate is shut.", age_s: float = 60
) -> Path:
    inbox.mkdir(exist_ok=True)
    path = inbox / name
    path.write_bytes(data if isinstance(data, bytes) else data.encode())
    os.utime(path, (NOW_S - age_s, NOW_S - age_s))
    return path


def archive(*numbers: int | str) -> bytes:
    """Lines of an archive: a number gives a good line, text is a line as it stands."""
    return b"".join(
        (json.dumps({"id": f"n{n}", "title": "Title"}) if isinstance(n, int) else n).encode()
        + b"\n"
        for n in numbers
    )


def settle(source, cursor=None, now_s=NOW_S):
    """Polls until nothing more waits; all of them."""
    polls = [source.poll(cursor or {}, now_s)]
    while polls[-1].more:
        assert len(polls) < 200, "the folder never comes to rest"
        # The cursor is stored as JSON between polls.
        polls.append(source.poll(json.loads(json.dumps(polls[-1].cursor)), now_s))
    return polls


def guids(polls) -> list[str]:
    return [item.guid for poll in polls for item in poll.items]


def faults(polls) -> list[str]:
    return [fault for poll in polls for fault in poll.faults]


def names(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir())


def test_the_folder_is_made_with_done_and_failed(inbox):
    poll = source_of(inbox).poll({}, NOW_S)
    assert names(inbox) == ["done", "failed"]
    assert (poll.items, poll.more, poll.faults) == ((), False, ())


def test_a_folder_that_cannot_be_made_is_a_source_error(tmp_path):
    (tmp_path / "file").write_text("x")
    with pytest.raises(SourceError, match="cannot be made ready"):
        source_of(tmp_path / "file" / "in").poll({}, NOW_S)


def test_files_are_moved_only_by_the_poll_after_the_one_that_took_them(inbox):
    drop(inbox, "a.txt")
    source = source_of(inbox)
    first = source.poll({}, NOW_S)
    assert (len(first.items), first.more) == (1, True)
    assert "a.txt" in names(inbox)
    second = source.poll(first.cursor, NOW_S)
    assert (second.items, second.more) == ((), False)
    assert names(inbox) == ["done", "failed"]
    assert names(inbox / "done") == ["a.txt"]


def test_putting_away_is_logged(inbox):
    drop(inbox, "a.txt")
    with capture_logs() as logs:
        settle(source_of(inbox))
    assert {
        "event": "folder_file_put_away",
        "log_level": "info",
        "source": "drop",
        "file": "a.txt",
        "accepted": True,
    } in logs


def test_files_are_taken_oldest_first(inbox):
    for name, age_s in (("b.txt", 30), ("a.txt", 10), ("c.txt", 20)):
        drop(inbox, name, f"{name}\nText", age_s)
    (poll, _) = settle(source_of(inbox))
    assert [item.title for item in poll.items] == ["b.txt", "c.txt", "a.txt"]


@pytest.mark.parametrize(("age_s", "taken"), [(0, 0), (1.9, 0), (2, 1), (3, 1)])
def test_a_file_still_being_written_is_left_alone(inbox, age_s, taken):
    drop(inbox, "a.txt", age_s=age_s)
    assert len(source_of(inbox).poll({}, NOW_S).items) == taken


def test_a_file_dated_in_the_future_is_taken_once_it_stays_the_same(inbox):
    drop(inbox, "a.txt", age_s=-3600)
    source = source_of(inbox)
    first = source.poll({}, NOW_S)
    second = source.poll(first.cursor, NOW_S + 1)
    third = source.poll(second.cursor, NOW_S + 2.5)
    assert [len(poll.items) for poll in (first, second, third)] == [0, 0, 1]
    assert not first.more


def test_a_file_dated_in_the_future_that_grows_waits_on(inbox):
    drop(inbox, "a.txt", age_s=-3600)
    source = source_of(inbox)
    first = source.poll({}, NOW_S)
    drop(inbox, "a.txt", "Longer than before, by far.", age_s=-3600)
    second = source.poll(first.cursor, NOW_S + 5)
    third = source.poll(second.cursor, NOW_S + 10)
    assert [len(poll.items) for poll in (first, second, third)] == [0, 0, 1]


@pytest.mark.parametrize("name", [".a.txt", "a.txt.tmp", "a.txt.part", "a.txt~", "a.TMP"])
def test_hidden_and_unfinished_names_are_left_alone(inbox, name):
    drop(inbox, name)
    assert guids(settle(source_of(inbox))) == []
    assert name in names(inbox)


def test_links_and_subfolders_are_left_alone(inbox, tmp_path):
    outside = drop(tmp_path, "outside.txt")
    drop(inbox, "a.txt")
    (inbox / "link.txt").symlink_to(outside)
    (inbox / "folder.txt").mkdir()
    os.mkfifo(inbox / "pipe.txt")
    assert len(guids(settle(source_of(inbox)))) == 1
    assert names(inbox) == ["done", "failed", "folder.txt", "link.txt", "pipe.txt"]


@pytest.mark.parametrize("name", ["a.TXT", "a.Html", "a.HTM", "a.EML"])
def test_extensions_are_told_in_any_case(inbox, name):
    drop(inbox, name, "Subject: Gate\n\nText")
    assert len(guids(settle(source_of(inbox)))) == 1
    assert names(inbox / "done") == [name]


@pytest.mark.parametrize(
    ("name", "data", "reason"),
    [
        ("a.pdf", b"%PDF", "its name ends in none of .txt, .html, .htm, .eml, .jsonl, .jsonl.gz"),
        ("a.gz", b"x", "its name ends in none of .txt, .html, .htm, .eml, .jsonl, .jsonl.gz"),
        ("README", b"x", "its name ends in none of .txt, .html, .htm, .eml, .jsonl, .jsonl.gz"),
        ("a.txt", b"", "it is empty"),
        ("a.txt", b" \n\t ", "it is empty"),
        ("a.txt", b"\xef\xbb\xbf\n", "it holds no text"),
        ("a.html", b"", "it is empty"),
        ("a.eml", b"", "it is empty"),
        ("a.eml", b"From: a@b.example\n\n", "it has neither a subject nor a text"),
        ("a.jsonl", b"", "it is empty"),
        ("a.jsonl", b"\n \n", "it is empty"),
    ],
)
def test_a_file_that_gives_nothing_goes_to_failed_with_its_reason(inbox, name, data, reason):
    drop(inbox, name, data)
    drop(inbox, "good.txt")
    polls = settle(source_of(inbox))
    sentence = f"{name} is left out: {reason}."
    assert len(guids(polls)) == 1
    assert faults(polls) == [sentence]
    assert names(inbox / "failed") == [name, f"{name}.reason"]
    assert (inbox / "failed" / f"{name}.reason").read_text() == sentence + "\n"
    assert names(inbox / "done") == ["good.txt"]


def test_a_file_of_more_than_50_mb_goes_to_failed(inbox):
    path = drop(inbox, "a.txt")
    with path.open("r+b") as file:
        file.truncate(50 * 2**20 + 1)
    os.utime(path, (NOW_S - 60, NOW_S - 60))
    assert faults(settle(source_of(inbox))) == ["a.txt is left out: it is larger than 50 MB."]
    assert names(inbox / "failed") == ["a.txt", "a.txt.reason"]


@pytest.mark.skipif(os.geteuid() == 0, reason="root may read every file")
def test_a_file_without_permission_goes_to_failed(inbox):
    drop(inbox, "a.jsonl", archive(1)).chmod(0)
    assert faults(settle(source_of(inbox))) == [
        "a.jsonl is left out: it cannot be read (Permission denied)."
    ]


def test_an_archive_with_bad_lines_gives_its_good_ones_and_goes_to_failed(inbox):
    drop(inbox, "wire.jsonl", archive(1, "{bad", 3, "[]", 5))
    polls = settle(source_of(inbox))
    told = [
        "wire.jsonl, line 2: not JSON; the line is left out.",
        "wire.jsonl, line 4: no JSON object; the line is left out.",
    ]
    assert guids(polls) == ["n1", "n3", "n5"]
    assert faults(polls) == told
    reason = (inbox / "failed" / "wire.jsonl.reason").read_text()
    assert reason.splitlines() == ["wire.jsonl: 3 items were accepted, 2 faults found.", *told]


def test_a_reason_lists_the_first_hundred_bad_lines_and_counts_all(inbox):
    drop(inbox, "wire.jsonl", archive(*["bad"] * 250, 251))
    polls = settle(source_of(inbox, batch_items=40))
    assert len(faults(polls)) == 250
    reason = (inbox / "failed" / "wire.jsonl.reason").read_text().splitlines()
    assert reason[0] == "wire.jsonl: 1 items were accepted, 250 faults found."
    assert len(reason) == 101
    assert reason[100] == "wire.jsonl, line 100: not JSON; the line is left out."


def test_damaged_gzip_gives_its_lines_and_goes_to_failed(inbox):
    drop(inbox, "wire.jsonl.gz", gzip.compress(archive(1, 2))[:-4])
    polls = settle(source_of(inbox))
    assert guids(polls) == ["n1", "n2"]
    assert names(inbox / "failed") == ["wire.jsonl.gz", "wire.jsonl.gz.reason"]


@pytest.mark.parametrize("batch_items", [1, 2, 3, 5, 1000])
@pytest.mark.parametrize("pack", [bytes, gzip.compress])
def test_a_big_archive_comes_in_batches(inbox, batch_items, pack):
    drop(inbox, "wire.jsonl.gz", pack(archive(*range(1, 11))))
    drop(inbox, "z.jsonl", archive(11), age_s=30)
    polls = settle(source_of(inbox, batch_items=batch_items))
    assert guids(polls) == [f"n{n}" for n in range(1, 12)]
    assert all(len(poll.items) <= batch_items for poll in polls)
    assert names(inbox / "done") == ["wire.jsonl.gz", "z.jsonl"]


def test_a_line_s_source_gives_way_to_the_folder(inbox):
    drop(inbox, "wire.jsonl", b'{"id": "a", "title": "T", "source": "elsewhere"}\n')
    (poll, _) = settle(source_of(inbox))
    assert [item.source for item in poll.items] == [None]


def test_items_without_a_language_have_the_source_s(inbox):
    drop(inbox, "a.txt")
    drop(inbox, "wire.jsonl", b'{"id": "a", "title": "T", "language": "de"}\n', age_s=30)
    (poll, _) = settle(source_of(inbox, language="fr"))
    assert [item.language for item in poll.items] == ["fr", "de"]


def test_a_taken_name_gets_a_number_before_its_extension(inbox):
    source, cursor = source_of(inbox), {}
    for number in range(3):
        drop(inbox, "a.txt", f"Gate {number}\nText")
        drop(inbox, "b.jsonl.gz", archive(number))
        drop(inbox, "c.pdf")
        cursor = settle(source, cursor)[-1].cursor
    assert names(inbox / "done") == [
        "a-1.txt", "a-2.txt", "a.txt", "b-1.jsonl.gz", "b-2.jsonl.gz", "b.jsonl.gz",
    ]  # fmt: skip
    assert names(inbox / "failed") == [
        "c-1.pdf", "c-1.pdf.reason", "c-2.pdf", "c-2.pdf.reason", "c.pdf", "c.pdf.reason",
    ]  # fmt: skip


def test_names_that_no_message_can_show_are_replaced(inbox):
    inbox.mkdir()
    for name in (b"a\xff.txt", b"b\nc.txt"):
        drop(inbox, os.fsdecode(name), b"Gate\nText of " + name)
    assert len(guids(settle(source_of(inbox)))) == 2
    assert names(inbox / "done") == ["a_.txt", "b_c.txt"]


def test_the_longest_names_can_be_put_away(inbox):
    drop(inbox, "ü" * 125 + ".txt", "Gate\nText")
    drop(inbox, "x" * 251 + ".pdf")
    drop(inbox, "y." + "z" * 250)
    assert len(guids(settle(source_of(inbox)))) == 1
    assert names(inbox) == ["done", "failed"]


def test_a_file_that_cannot_be_moved_is_told_once_and_not_taken_again(inbox):
    drop(inbox, "a.txt")
    source = source_of(inbox)
    first = source.poll({}, NOW_S)
    # Every name in done/ is refused: it is no folder any more that takes files.
    done = inbox / "done"
    done.rmdir()
    done.symlink_to("/proc/self", target_is_directory=True)
    second = source.poll(first.cursor, NOW_S)
    third = source.poll(second.cursor, NOW_S)
    assert len(second.faults) == 1
    assert "a.txt was read but cannot be moved" in second.faults[0]
    assert (second.items, second.more) == ((), False)
    assert (third.items, third.faults, third.more) == ((), (), False)
    done.unlink()
    last = source.poll(third.cursor, NOW_S)
    assert (last.items, last.more) == ((), False)
    assert names(done) == ["a.txt"]
