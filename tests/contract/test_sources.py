"""What every source owes to the daemon, run against each implementation."""

import copy
import json
from types import MappingProxyType

import pytest

from vanner.records import Poll, RawItem

# After every date of the rigs' items, so that nothing is still being written.
NOW_S = 2_000_000_000.0


def drain(source, cursor):
    """Poll as the daemon does, until there is no more: all items and the last cursor."""
    items = []
    for _ in range(100):
        poll = source.poll(cursor, NOW_S)
        assert poll.faults == ()
        items += poll.items
        cursor = poll.cursor
        if not poll.more:
            return items, cursor
    pytest.fail("the source always says that there is more")


def guids(items):
    return [item.guid for item in items]


@pytest.fixture
def source(rig):
    source = rig.make()
    yield source
    source.close()


def test_it_bears_the_name_of_its_settings(source):
    assert source.name == "harbour"


def test_with_nothing_out_there_a_poll_is_empty(source):
    poll = source.poll({}, NOW_S)
    assert isinstance(poll, Poll)
    assert (poll.items, poll.faults, poll.more, poll.stopped) == ((), (), False, None)


def test_the_first_poll_finds_all_oldest_first(rig, source):
    rig.add(5)
    items, _ = drain(source, {})
    assert all(isinstance(item, RawItem) for item in items)
    texts = [f"{item.title} {item.content_text}" for item in items]
    assert [text.partition("Item ")[2][:1] for text in texts] == ["0", "1", "2", "3", "4"]
    assert None not in guids(items)
    assert len(set(guids(items))) == 5


def test_the_next_poll_finds_nothing_new(rig, source):
    rig.add(5)
    items, cursor = drain(source, {})
    again, _ = drain(source, cursor)
    assert set(guids(again)) <= set(guids(items))


def test_the_next_poll_finds_what_was_added(rig, source):
    rig.add(3)
    items, cursor = drain(source, {})
    rig.add()
    later, _ = drain(source, cursor)
    assert len(set(guids(later)) - set(guids(items))) == 1


def test_what_comes_after_an_empty_first_poll_is_found(rig, source):
    _, cursor = drain(source, {})
    rig.add(2)
    items, _ = drain(source, cursor)
    assert len(items) == 2


def test_the_cursor_survives_json(rig, source):
    rig.add(3)
    _, cursor = drain(source, {})
    stored = json.loads(json.dumps(dict(cursor)))
    assert stored == dict(cursor)
    rig.add()
    assert guids(source.poll(stored, NOW_S).items) == guids(source.poll(cursor, NOW_S).items)


def test_a_source_made_anew_goes_on_from_the_cursor(rig, source):
    rig.add(3)
    items, cursor = drain(source, {})
    source.close()
    rig.add()
    other = rig.make()
    later, _ = drain(other, json.loads(json.dumps(dict(cursor))))
    other.close()
    assert len(set(guids(later)) - set(guids(items))) == 1


def test_a_poll_leaves_its_cursor_as_it_was(rig, source):
    rig.add(3)
    cursor = {}
    for _ in range(3):
        before = copy.deepcopy(cursor)
        poll = source.poll(MappingProxyType(cursor), NOW_S)
        assert cursor == before
        cursor = dict(poll.cursor)
        rig.add()


def test_a_poll_whose_outcome_was_lost_can_be_repeated(rig, source):
    rig.add(3)
    lost = source.poll({}, NOW_S)
    assert guids(source.poll({}, NOW_S).items) == guids(lost.items)


def test_a_later_poll_whose_outcome_was_lost_is_repeated_after_a_restart(rig, source):
    # Only the last poll: a cursor that is handed back tells that it was committed.
    rig.add(2)
    _, cursor = drain(source, {})
    rig.add(2)
    lost = source.poll(cursor, NOW_S)
    source.close()
    restarted = rig.make()
    again = restarted.poll(cursor, NOW_S)
    restarted.close()
    assert guids(again.items) == guids(lost.items)
    assert len(lost.items) >= 2


def test_identifiers_do_not_change_between_polls(rig, source):
    rig.add(4)
    other = rig.make()
    ours, theirs = source.poll({}, NOW_S).items, other.poll({}, NOW_S + 3600).items
    other.close()
    assert guids(ours) == guids(theirs)


def test_a_failed_poll_raises_the_error_that_the_daemon_expects(rig, source):
    rig.add(2)
    rig.break_down()
    with pytest.raises(rig.error) as raised:
        source.poll({}, NOW_S)
    sentence = str(raised.value)
    assert sentence.endswith(".")
    assert "\n" not in sentence


def test_after_a_failure_the_old_cursor_recovers_everything(rig, source):
    rig.add(2)
    items, cursor = drain(source, {})
    before = copy.deepcopy(dict(cursor))
    rig.break_down()
    for _ in range(2):
        with pytest.raises(rig.error):
            source.poll(cursor, NOW_S)
    assert dict(cursor) == before
    rig.mend()
    rig.add(2)
    later, _ = drain(source, cursor)
    assert len(set(guids(later)) - set(guids(items))) == 2


def test_a_first_poll_that_failed_loses_nothing(rig, source):
    rig.add(2)
    rig.break_down()
    with pytest.raises(rig.error):
        source.poll({}, NOW_S)
    rig.mend()
    assert len(drain(source, {})[0]) == 2


def test_it_can_be_closed_twice_and_unused(rig, source):
    rig.make().close()
    rig.add()
    source.poll({}, NOW_S)
    source.close()
    source.close()
