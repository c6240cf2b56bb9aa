"""An archive as a source: batches, cursors and what a poll that is thrown away costs."""

import gzip
import json

import pytest

from vanner.errors import InputError
from vanner.sources.archive import ArchiveSource

NOW_S = 1.7e9


@pytest.fixture
def archive(tmp_path):
    path = tmp_path / "wire.jsonl.gz"
    lines = [json.dumps({"id": f"n{n}", "title": "Title"}) for n in range(1, 8)]
    lines.insert(3, "{bad")
    path.write_bytes(gzip.compress("\n".join(lines).encode()))
    return path


def polls(source, cursor=None):
    """All polls of an archive until it says that no more is there."""
    found = [source.poll(cursor or {}, NOW_S)]
    while found[-1].more:
        found.append(source.poll(found[-1].cursor, NOW_S))
    return found


@pytest.mark.parametrize("batch_items", [1, 2, 3, 7, 8, 1000])
def test_batches_of_any_size_give_every_item_once(archive, batch_items):
    source = ArchiveSource("wire", archive, batch_items=batch_items)
    found = polls(source)
    assert [item.guid for poll in found for item in poll.items] == [f"n{n}" for n in range(1, 8)]
    assert [fault for poll in found for fault in poll.faults] == [
        "wire.jsonl.gz, line 4: not JSON; the line is left out."
    ]
    assert all(len(poll.items) <= batch_items for poll in found)
    source.close()


def test_items_teach_and_the_cursor_is_the_last_line(archive):
    source = ArchiveSource("wire", archive, batch_items=2)
    poll = source.poll({}, NOW_S)
    assert (poll.teaches, poll.more, poll.cursor) == (True, True, {"line": 2})
    assert source.name == "wire"
    source.close()


def test_a_poll_that_is_thrown_away_is_repeated(archive):
    source = ArchiveSource("wire", archive, batch_items=3)
    first = source.poll({}, NOW_S)
    lost = source.poll(first.cursor, NOW_S)
    again = source.poll(first.cursor, NOW_S)
    assert again == lost
    source.close()


def test_another_source_goes_on_from_a_cursor(archive):
    source = ArchiveSource("wire", archive, batch_items=3)
    cursor = source.poll({}, NOW_S).cursor
    source.close()
    later = ArchiveSource("wire", archive, batch_items=100)
    assert [item.guid for item in later.poll(cursor, NOW_S).items] == ["n4", "n5", "n6", "n7"]


def test_a_missing_archive_is_an_input_error_each_time(tmp_path):
    source = ArchiveSource("wire", tmp_path / "none.jsonl")
    for _ in range(2):
        with pytest.raises(InputError):
            source.poll({}, NOW_S)
