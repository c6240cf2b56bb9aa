"""Outgoing mail: composed and stored with what caused it, handed over afterwards.

A mail must not go out twice. It is marked `sending` in a transaction of its own right before
its text is handed to the server; if the program dies between that and `sent`, nobody can know
whether the server took it. Such a message becomes `unconfirmed` at the next start and is not
sent again: what it said is in the database and in the next digest.
"""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import dataclass

from sqlalchemy import Connection, func, select, update
from sqlalchemy.dialects.sqlite import insert as upsert

from vanner.records import Message
from vanner.store.schema import message


def queue(connection: Connection, one: Message, *, withheld: bool = False) -> bool:
    """Store a message unless its key exists; whether it was new.

    Args:
        connection: The transaction of what the message is about.
        one: The message.
        withheld: Keep it for the record only (a rebuilt database sends nothing of the past).
    """
    result = connection.execute(
        upsert(message)
        .values(
            key=one.key,
            desk=one.desk,
            recipients=json.dumps(one.recipients),
            subject=one.subject,
            body_text=one.body_text,
            body_html=one.body_html,
            headers=json.dumps(dict(one.headers), sort_keys=True),
            created_s=one.created_s,
            not_after_s=one.not_after_s,
            state="withheld" if withheld else "queued",
            attempts=0,
            next_try_s=one.created_s,
        )
        .on_conflict_do_nothing()
    )
    return bool(result.rowcount)


def due(connection: Connection, now_s: float, limit: int = 50) -> list[Message]:
    """Queued messages whose time has come, oldest first."""
    rows = connection.execute(
        select(message)
        .where(message.c.state == "queued", message.c.next_try_s <= now_s)
        .order_by(message.c.created_s, message.c.key)
        .limit(limit)
    )
    return [
        Message(
            row.key,
            row.desk,
            tuple(json.loads(row.recipients)),
            row.subject,
            row.body_text,
            row.body_html,
            row.created_s,
            row.not_after_s,
            json.loads(row.headers),
        )
        for row in rows
    ]


def mark(
    connection: Connection,
    key: str,
    state: str,
    *,
    now_s: float | None = None,
    last_error: str | None = None,
) -> None:
    """Set a message's state; `now_s` is kept as the time of sending where it was sent."""
    connection.execute(
        update(message)
        .where(message.c.key == key)
        .values(state=state, last_error=last_error, sent_s=now_s if state == "sent" else None)
    )


def try_later(connection: Connection, key: str, next_try_s: float, last_error: str) -> None:
    """Put a message back in the queue after a passing failure."""
    connection.execute(
        update(message)
        .where(message.c.key == key)
        .values(
            state="queued",
            attempts=message.c.attempts + 1,
            next_try_s=next_try_s,
            last_error=last_error,
        )
    )


def attempts_of(connection: Connection, key: str) -> int:
    """How many times handing a message over has failed."""
    return int(
        connection.execute(select(message.c.attempts).where(message.c.key == key)).scalar_one()
    )


def settle_interrupted(connection: Connection) -> list[str]:
    """Mark messages found in mid-sending at start as unconfirmed; their keys."""
    keys = list(
        connection.execute(select(message.c.key).where(message.c.state == "sending")).scalars()
    )
    connection.execute(
        update(message).where(message.c.state == "sending").values(state="unconfirmed")
    )
    return keys


def counts_by_state(connection: Connection) -> dict[str, int]:
    """How many messages are in each state."""
    rows = connection.execute(select(message.c.state, func.count()).group_by(message.c.state))
    return {row[0]: row[1] for row in rows}


@dataclass(frozen=True, slots=True)
class Handled:
    """What became of a message in another database."""

    key: str
    state: str
    attempts: int
    sent_s: float | None
    last_error: str | None


def handled(connection: Connection) -> list[Handled]:
    """The state of every message."""
    rows = connection.execute(
        select(
            message.c.key,
            message.c.state,
            message.c.attempts,
            message.c.sent_s,
            message.c.last_error,
        )
    )
    return [Handled(*row) for row in rows]


def take_over(connection: Connection, states: Sequence[Handled]) -> None:
    """Give messages the state that those of the same key have elsewhere."""
    for one in states:
        connection.execute(
            update(message)
            .where(message.c.key == one.key)
            .values(
                state=one.state,
                attempts=one.attempts,
                sent_s=one.sent_s,
                last_error=one.last_error,
            )
        )
