"""The folder under crashes and under people who change files meanwhile.

A poll whose result is thrown away stands for a crash before the commit, one whose cursor is
kept but whose source is made anew for a crash after it.
"""

import json
import os
import random

import pytest

from vanner.settings import FolderSettings
from vanner.sources.batch import Batch
from vanner.sources.folder import FolderSource
from vanner.sources.folder.files import make_ready, put_away, return_unread, stamp_of
from vanner.sources.folder.state import Finished, Progress
from vanner.sources.folder.take import Taker

NOW_S = 1_700_000_000.0


@pytest.fixture
def inbox(tmp_path):
    (tmp_path / "in").mkdir()
    return tmp_path / "in"


def source_of(inbox, batch_items=1000):
    settings = FolderSettings(name="drop", kind="folder", path=inbox)
    return FolderSource(settings, batch_items=batch_items)


def drop(inbox, name, data, age_s=60.0):
    path = inbox / name
    path.write_bytes(data)
    os.utime(path, (NOW_S - age_s, NOW_S - age_s))
    return path


def archive(*numbers):
    return b"".join(json.dumps({"id": f"n{n}", "title": "T"}).encode() + b"\n" for n in numbers)


def names(folder):
    return sorted(path.name for path in folder.iterdir())


def test_a_poll_thrown_away_before_the_commit_loses_nothing(inbox):
    drop(inbox, "a.txt", b"Gate\nText")
    drop(inbox, "bad.txt", b"")
    lost = source_of(inbox).poll({}, NOW_S)
    again = source_of(inbox).poll({}, NOW_S)
    assert again == lost
    assert len(again.items) == 1


def test_a_poll_thrown_away_after_moving_loses_nothing(inbox):
    drop(inbox, "a.txt", b"Gate\nText")
    first = source_of(inbox).poll({}, NOW_S)
    drop(inbox, "b.txt", b"Weir\nText")
    lost = source_of(inbox).poll(first.cursor, NOW_S)
    again = source_of(inbox).poll(first.cursor, NOW_S)
    assert names(inbox / "done") == ["a.txt"]
    assert again.items == lost.items
    assert [item.title for item in again.items] == ["Weir"]


@pytest.mark.parametrize("seed", range(20))
def test_killed_at_random_moments_every_item_is_committed_once_by_key(inbox, seed):
    dice = random.Random(seed)
    expected = {f"n{n}" for n in range(60)}
    drop(inbox, "a.jsonl", archive(*range(40)), 50)
    drop(inbox, "b.jsonl", archive(*range(40, 50)) + b"bad\n", 40)
    for n in range(50, 60):
        mail = f"Message-ID: <n{n}>\nSubject: T\n\nText".encode()
        drop(inbox, f"m{n}.eml", mail, 30)
    committed: list[str] = []
    cursor, source, more = {}, source_of(inbox, 7), True
    for _ in range(1000):
        poll = source.poll(cursor, NOW_S)
        if dice.random() < 0.4:
            source.close()
            source = source_of(inbox, 7)
            if dice.random() < 0.7:
                continue
        committed += [item.guid for item in poll.items]
        cursor, more = json.loads(json.dumps(poll.cursor)), poll.more
        if not more:
            break
    assert not more
    assert set(committed) == expected
    assert len(committed) == len(expected)
    assert names(inbox) == ["done", "failed"]
    assert names(inbox / "failed") == ["b.jsonl", "b.jsonl.reason"]
    assert len(names(inbox / "done")) == 11


def test_a_file_changed_after_it_was_taken_is_taken_anew(inbox):
    drop(inbox, "a.txt", b"Gate\nText")
    source = source_of(inbox)
    first = source.poll({}, NOW_S)
    drop(inbox, "a.txt", b"Gate\nText and more", 30)
    second = source.poll(first.cursor, NOW_S)
    assert [item.content_text for item in second.items] == ["Text and more"]
    assert names(inbox / "done") == []
    source.poll(second.cursor, NOW_S)
    assert names(inbox / "done") == ["a.txt"]


def test_a_file_changed_after_it_was_taken_waits_until_it_is_whole(inbox):
    drop(inbox, "a.txt", b"Gate\nText")
    source = source_of(inbox)
    first = source.poll({}, NOW_S)
    drop(inbox, "a.txt", b"Gate\nText and", 0)
    second = source.poll(first.cursor, NOW_S)
    assert (second.items, names(inbox / "done")) == ((), [])
    drop(inbox, "a.txt", b"Gate\nText and more", 0)
    third = source.poll(second.cursor, NOW_S + 5)
    assert [item.content_text for item in third.items] == ["Text and more"]


def test_an_archive_changed_between_batches_is_read_from_its_beginning(inbox):
    drop(inbox, "a.jsonl", archive(1, 2, 3, 4))
    source = source_of(inbox, 2)
    first = source.poll({}, NOW_S)
    drop(inbox, "a.jsonl", archive(5, 6, 7), 30)
    second = source.poll(first.cursor, NOW_S)
    third = source.poll(second.cursor, NOW_S)
    assert [item.guid for item in second.items + third.items] == ["n5", "n6", "n7"]
    source.close()


@pytest.mark.parametrize("name", ["a.txt", "a.jsonl", "a.pdf"])
def test_nothing_is_taken_of_a_file_that_changes_while_it_is_read(inbox, name):
    before = stamp_of(drop(inbox, name, b"Gate\nText", 60))
    drop(inbox, name, b"Gate\nText and more", 30)
    taker, batch = Taker(inbox, None), Batch(10)
    assert taker.take(Progress(name=name, stamp=before), batch) is None
    assert (batch.items, batch.faults) == ([], [])


def test_an_archive_removed_between_batches_is_forgotten(inbox):
    path = drop(inbox, "a.jsonl", archive(1, 2, 3, 4))
    source = source_of(inbox, 2)
    first = source.poll({}, NOW_S)
    path.unlink()
    second = source.poll(first.cursor, NOW_S)
    assert (second.items, second.more, second.faults) == ((), False, ())
    source.close()


def test_a_file_that_was_put_away_already_is_no_fault(inbox):
    path = drop(inbox, "a.txt", b"Gate\nText")
    taken = Finished(name="a.txt", stamp=stamp_of(path))
    make_ready(inbox)
    assert put_away(inbox, taken) is None
    assert put_away(inbox, taken) is None
    assert names(inbox / "done") == ["a.txt"]


def test_an_unread_file_that_was_moved_comes_back_under_a_free_name(inbox):
    make_ready(inbox)
    moved = drop(inbox / "failed", "a.txt", b"Gate\nUnread")
    drop(inbox / "failed", "a.txt.reason", b"It was another file.")
    drop(inbox, "a.txt", b"Gate\nText")
    return_unread(inbox, moved)
    assert names(inbox / "failed") == []
    assert names(inbox) == ["a-1.txt", "a.txt", "done", "failed"]
    assert len(source_of(inbox).poll({}, NOW_S).items) == 2


def test_the_same_bytes_under_another_name_have_the_same_identifier(inbox):
    for name in ("a.txt", "b.txt", "c.html", "d.html", "e.eml", "f.eml"):
        drop(inbox, name, b"Subject: Gate\n\nThe gate is shut.")
    items = source_of(inbox).poll({}, NOW_S).items
    assert len(items) == 6
    assert len({item.guid for item in items}) == 1
    assert items[0].guid.startswith("sha256:")


def test_a_cursor_that_cannot_be_read_counts_as_empty(inbox):
    drop(inbox, "a.txt", b"Gate\nText")
    poll = source_of(inbox).poll({"accepted": [{"name": 7}], "progress": "x"}, NOW_S)
    assert len(poll.items) == 1
