"""Outgoing mail: no message goes out twice, whatever happens between the states."""

from dataclasses import replace

import pytest

from vanner.records import Message
from vanner.store.outbox import (
    Handled,
    attempts_of,
    counts_by_state,
    due,
    handled,
    mark,
    queue,
    settle_interrupted,
    take_over,
    try_later,
)

NOW_S = 1_756_713_600.0
STATES = ("queued", "sending", "sent", "refused", "stale", "unconfirmed", "withheld")


def message(key, created_s=NOW_S):
    return Message(
        key=key,
        desk="harbour",
        recipients=("rota@harbour.example", "Ægir <aegir@harbour.example>"),
        subject="Dredger aground — två",
        body_text="Text\n",
        body_html="<p>Text</p>",
        created_s=created_s,
        not_after_s=NOW_S + 3600,
        headers={"References": "<a@harbour.example>", "Auto-Submitted": "auto-generated"},
    )


@pytest.fixture
def write(database):
    def run(work, *arguments, **told):
        with database.write() as connection:
            return work(connection, *arguments, **told)

    return run


@pytest.fixture
def keys_due(database):
    def run(now_s, limit=50):
        with database.read() as connection:
            return [one.key for one in due(connection, now_s, limit)]

    return run


def test_a_message_comes_back_as_it_was_queued(database, write):
    assert write(queue, message("one"))
    with database.read() as connection:
        assert due(connection, NOW_S) == [message("one")]


def test_a_message_without_headers_or_limit_comes_back_so(database, write):
    plain = replace(message("one"), headers={}, not_after_s=None)
    write(queue, plain)
    with database.read() as connection:
        assert due(connection, NOW_S) == [plain]


def test_a_key_is_queued_once_and_the_first_stands(database, write):
    write(queue, message("one"))
    assert not write(queue, replace(message("one"), subject="Again"))
    with database.read() as connection:
        assert [one.subject for one in due(connection, NOW_S)] == ["Dredger aground — två"]


@pytest.mark.parametrize("state", STATES)
def test_a_key_that_was_handled_is_not_queued_again(write, keys_due, state, database):
    write(queue, message("one"))
    write(mark, "one", state)
    assert not write(queue, message("one"))
    with database.read() as connection:
        assert counts_by_state(connection) == {state: 1}
    assert keys_due(NOW_S + 1e9) == (["one"] if state == "queued" else [])


def test_messages_are_due_from_their_time_on_oldest_first(write, keys_due):
    for key, created_s in [("late", NOW_S + 60), ("b", NOW_S), ("a", NOW_S), ("old", NOW_S - 60)]:
        write(queue, message(key, created_s))
    assert keys_due(NOW_S) == ["old", "a", "b"]
    assert keys_due(NOW_S + 60, limit=2) == ["old", "a"]
    assert keys_due(NOW_S + 60) == ["old", "a", "b", "late"]


def test_withheld_mail_is_kept_and_never_due(write, keys_due, sql):
    assert write(queue, message("one"), withheld=True)
    assert keys_due(NOW_S + 1e9) == []
    assert sql("SELECT key, state FROM message") == [("one", "withheld")]


def test_after_a_passing_failure_a_message_waits_and_counts_it(write, keys_due, sql):
    write(queue, message("one"))
    write(mark, "one", "sending")
    write(try_later, "one", NOW_S + 120, "451 later")
    assert keys_due(NOW_S + 119) == []
    assert keys_due(NOW_S + 120) == ["one"]
    assert write(attempts_of, "one") == 1
    write(try_later, "one", NOW_S + 400, "no route")
    assert sql("SELECT state, attempts, last_error FROM message") == [("queued", 2, "no route")]


def test_only_a_message_that_was_sent_has_a_time_of_sending(write, sql):
    for key in ("one", "two"):
        write(queue, message(key))
    write(mark, "one", "sent", now_s=NOW_S + 5, last_error="refused for a@harbour.example")
    write(mark, "two", "stale", now_s=NOW_S + 5)
    assert sql("SELECT key, state, sent_s, last_error FROM message ORDER BY key") == [
        ("one", "sent", NOW_S + 5, "refused for a@harbour.example"),
        ("two", "stale", None, None),
    ]


def test_what_was_in_mid_sending_at_a_start_is_unconfirmed_and_not_sent_again(write, keys_due, sql):
    for key in STATES:
        write(queue, message(key))
        write(mark, key, key)
    assert write(settle_interrupted) == ["sending"]
    assert write(settle_interrupted) == []
    assert keys_due(NOW_S + 1e9) == ["queued"]
    found = dict(sql("SELECT key, state FROM message"))
    assert found == {key: key for key in STATES} | {"sending": "unconfirmed"}


def test_states_are_counted(database, write):
    with database.read() as connection:
        assert counts_by_state(connection) == {}
    for key in ("one", "two", "three"):
        write(queue, message(key))
    write(mark, "two", "sent", now_s=NOW_S)
    with database.read() as connection:
        assert counts_by_state(connection) == {"queued": 2, "sent": 1}


def test_messages_take_over_the_state_of_the_same_key_elsewhere(database, write, sql):
    for key in ("one", "two", "own"):
        write(queue, message(key), withheld=True)
    states = [
        Handled("one", "sent", 2, NOW_S + 9, None),
        Handled("two", "queued", 1, None, "451 later"),
        Handled("unknown", "sent", 0, NOW_S, None),
    ]
    write(take_over, states)
    assert sql("SELECT key, state, attempts, sent_s, last_error FROM message ORDER BY key") == [
        ("one", "sent", 2, NOW_S + 9, None),
        ("own", "withheld", 0, None, None),
        ("two", "queued", 1, None, "451 later"),
    ]
    with database.read() as connection:
        assert set(states[:2]) < set(handled(connection))
