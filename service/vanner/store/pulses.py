"""The clock of pulses: which items wait, and committing what a pulse concluded."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass
from itertools import groupby

from sqlalchemy import Connection, bindparam, delete, insert, select, update
from sqlalchemy.dialects.sqlite import insert as upsert

from vanner.clock import pulse_end_s, pulse_of
from vanner.records import Reading, StoredItem, StoryRecord
from vanner.store.database import Database
from vanner.store.rows import insert_rows
from vanner.store.schema import (
    clock,
    item,
    item_revision,
    reading,
    story,
    story_item,
    story_term,
    topic,
)

_ROWS_A_FETCH = 2000


@dataclass(frozen=True, slots=True)
class ClockState:
    """Where a database's pulses stand; see `schema.clock`."""

    pulse_s: float
    closed_s: float
    read_s: float
    purpose: str


def clock_state(connection: Connection) -> ClockState | None:
    """The clock's row, or None in a database that nothing has begun to serve."""
    row = connection.execute(select(clock)).one_or_none()
    return None if row is None else ClockState(row.pulse_s, row.closed_s, row.read_s, row.purpose)


def start_clock(connection: Connection, state: ClockState) -> None:
    """Write the clock's only row."""
    connection.execute(
        upsert(clock)
        .values(
            clock_id=1,
            pulse_s=state.pulse_s,
            closed_s=state.closed_s,
            read_s=state.read_s,
            purpose=state.purpose,
        )
        .on_conflict_do_update(
            index_elements=["clock_id"],
            set_={
                "pulse_s": state.pulse_s,
                "closed_s": state.closed_s,
                "read_s": state.read_s,
                "purpose": state.purpose,
            },
        )
    )


def close_until(connection: Connection, until_s: float) -> None:
    """Let no more items into the pulses that end by `until_s`."""
    connection.execute(update(clock).where(clock.c.closed_s < until_s).values(closed_s=until_s))


def mark_read(connection: Connection, until_s: float) -> None:
    """Note, in the transaction of their results, that pulses up to a time are read."""
    connection.execute(update(clock).where(clock.c.read_s < until_s).values(read_s=until_s))


def pulses_between(
    database: Database,
    from_s: float,
    until_s: float,
    pulse_s: float,
    *,
    rows_a_fetch: int = _ROWS_A_FETCH,
) -> Iterator[tuple[float, list[StoredItem]]]:
    """Pulses that hold items received in [from_s, until_s), each with its end, in order.

    Items of a pulse come in the order of their receipt and number. Rows are fetched a few
    thousand at a time, so that a long archive does not have to fit in memory.
    """
    position = from_s
    while True:
        rows = _fetch(database, position, until_s, rows_a_fetch)
        if not rows:
            return
        whole = len(rows) < rows_a_fetch
        last = pulse_of(rows[-1].received_s, pulse_s)
        if not whole:
            kept = [one for one in rows if pulse_of(one.received_s, pulse_s) < last]
            if kept:
                rows = kept
            else:  # one pulse holds more rows than a fetch: take all of it
                rows = _fetch(database, position, min(until_s, pulse_end_s(last, pulse_s)), None)
        for number, members in groupby(rows, lambda one: pulse_of(one.received_s, pulse_s)):
            yield pulse_end_s(number, pulse_s), list(members)
        position = pulse_end_s(pulse_of(rows[-1].received_s, pulse_s), pulse_s)


def _fetch(
    database: Database, from_s: float, until_s: float, limit: int | None
) -> list[StoredItem]:
    query = (
        select(
            item_revision.c.item_id,
            item_revision.c.revision,
            item.c.source,
            item.c.guid,
            item_revision.c.title,
            item_revision.c.content_text,
            item_revision.c.language,
            item_revision.c.published_s,
            item_revision.c.received_s,
            item_revision.c.teaches,
        )
        .join(item, item.c.item_id == item_revision.c.item_id)
        .where(item_revision.c.received_s >= from_s, item_revision.c.received_s < until_s)
        .order_by(item_revision.c.received_s, item_revision.c.item_id, item_revision.c.revision)
        .limit(limit)
    )
    with database.read() as connection:
        return [StoredItem(**row) for row in connection.execute(query).mappings()]


def keep_readings(
    connection: Connection, desk: str, readings: Sequence[Reading], revised: Collection[int]
) -> None:
    """Write readings and topics.

    Args:
        connection: A write transaction.
        desk: The desk that made them.
        readings: One an item and revision; an item's last one stands.
        revised: Items that may have been read before: the earlier reading of one that is among
            the readings goes.
    """
    if not readings:
        return
    rows = {one.item_id: one for one in readings}
    again = [{"id": item_id} for item_id in rows if item_id in revised]
    for table in (topic, reading) if again else ():
        mine = (table.c.desk == desk) & (table.c.item_id == bindparam("id"))
        connection.execute(delete(table).where(mine), again)
    insert_rows(connection, reading, [_reading_row(desk, one) for one in rows.values()])
    topics = [
        (desk, one.item_id, t.term, t.weight, t.own_share, t.count)
        for one in rows.values()
        for t in one.topics
    ]
    insert_rows(connection, topic, topics)


def _reading_row(desk: str, one: Reading) -> tuple[object, ...]:
    shares = (one.standing, one.running, one.house, one.own)
    return (desk, one.item_id, one.words, *shares, one.bits_per_word)


def keep_stories(
    connection: Connection,
    desk: str,
    stories: Sequence[StoryRecord],
    end_s: float,
    ids: dict[int, int],
) -> None:
    """Write the stories that a pulse changed.

    Args:
        connection: A write transaction.
        desk: The desk that they belong to.
        stories: As they stand after the pulse.
        end_s: The pulse's end: items that were added at it are new, earlier ones are stored.
        ids: Story number -> story id as far as known; completed here. It must not outlive a
            transaction that was rolled back.
    """
    if not stories:
        return
    unknown = [one.number for one in stories if one.number not in ids]
    if unknown:
        ids.update(_story_ids(connection, desk, unknown))
    new = [one for one in stories if one.number not in ids]
    if new:
        connection.execute(insert(story), [_story_row(one) for one in new])
        ids.update(_story_ids(connection, desk, [one.number for one in new]))
    fresh = {one.number for one in new}
    known = [
        _story_row(one) | {"id": ids[one.number]} for one in stories if one.number not in fresh
    ]
    if known:
        connection.execute(_UPDATE_STORY, known)
    _keep_parts(connection, [(ids[one.number], one) for one in stories], end_s)


_UPDATE_STORY = (
    update(story)
    .where(story.c.story_id == bindparam("id"))
    .values({name: bindparam(name) for name in story.c.keys() if name != "story_id"})  # noqa: SIM118 - a collection of columns iterates over them, not over names
)
_FORGET_TERMS = delete(story_term).where(story_term.c.story_id == bindparam("id"))


def _story_row(one: StoryRecord) -> dict[str, object]:
    return {
        "desk": one.desk,
        "number": one.number,
        "noted_s": one.noted_s,
        "raised_s": one.raised_s,
        "last_activity_s": one.last_activity_s,
        "cleared_s": one.cleared_s,
        "headline_item_id": one.headline_item_id,
        "bits": one.bits,
        "threshold_bits": one.threshold_bits,
    }


def _story_ids(connection: Connection, desk: str, numbers: Sequence[int]) -> dict[int, int]:
    query = select(story.c.number, story.c.story_id).where(
        story.c.desk == desk, story.c.number.in_(numbers)
    )
    return {row.number: row.story_id for row in connection.execute(query)}


def _keep_parts(
    connection: Connection, stories: Sequence[tuple[int, StoryRecord]], end_s: float
) -> None:
    connection.execute(_FORGET_TERMS, [{"id": story_id} for story_id, _ in stories])
    terms = [
        (story_id, t.term, t.bits, t.seen, t.expected, t.joined_s)
        for story_id, one in stories
        for t in one.terms
    ]
    insert_rows(connection, story_term, terms)
    items = [
        (story_id, i.item_id, i.added_s)
        for story_id, one in stories
        for i in one.items
        if i.added_s == end_s
    ]
    insert_rows(connection, story_item, items)
