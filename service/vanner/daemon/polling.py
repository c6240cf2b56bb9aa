"""Polling one source: fetch, take in, accept with the cursor in one transaction."""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import dataclass

import structlog

from vanner.errors import RejectedItemError, SourceError
from vanner.intake import take_in
from vanner.records import Item, Poll, Source
from vanner.sources.backoff import next_poll_s
from vanner.store.accept import Accepted, accept, receive_time_s
from vanner.store.database import Database
from vanner.store.source_states import cursor_of, keep_cursor, note_failure, stopped_reason

log = structlog.get_logger()

# A source that has very much must not fill one pulse with all of it, nor keep its thread: after
# so many polls in a row it waits for a while.
POLLS_IN_A_ROW = 10
BACKLOG_WAIT_S = 20.0


@dataclass(frozen=True, slots=True)
class Polled:
    """What a turn of polling brought.

    Attributes:
        next_s: When to poll again, or None for never.
        failed: The failure's sentence, or None.
    """

    accepted: Accepted
    faults: tuple[str, ...]
    next_s: float | None
    failed: str | None = None


class Poller:
    """Polls one source of a running service."""

    def __init__(
        self,
        database: Database,
        source: Source,
        kind: str,
        every_s: float,
        rng: random.Random,
        clock: Callable[[], float],
    ) -> None:
        self.database = database
        self.source = source
        self.kind = kind
        self.every_s = every_s
        self._rng = rng
        self._clock = clock

    def turn(self) -> Polled:
        """Poll until the source has no more, and say when its next turn is.

        Raises:
            DatabaseError: The database refused; nothing of that poll was kept.
        """
        accepted = Accepted()
        faults: tuple[str, ...] = ()
        retry_at_s: float | None = None
        for _ in range(POLLS_IN_A_ROW):
            with self.database.read() as connection:
                cursor = cursor_of(connection, self.source.name)
                stopped = stopped_reason(connection, self.source.name)
            if stopped is not None:
                return Polled(accepted, faults, None, stopped)
            try:
                poll = self.source.poll(cursor, self._clock())
            except SourceError as error:
                return self._failed(error, accepted, faults)
            brought, left_out = self._accept(poll)
            accepted += brought
            faults += left_out
            retry_at_s = poll.retry_at_s
            if poll.stopped is not None:
                return Polled(accepted, faults, None, poll.stopped)
            if not poll.more:
                next_s = next_poll_s(self._clock(), self.every_s, 0, self._rng, retry_at_s)
                return Polled(accepted, faults, next_s)
        return Polled(accepted, faults, self._clock() + BACKLOG_WAIT_S)

    def _accept(self, poll: Poll) -> tuple[Accepted, tuple[str, ...]]:
        items, faults = self.taken_in(poll)
        with self.database.write() as connection:
            # Read inside the transaction: no pulse can close between this and the commit.
            now_s = receive_time_s(connection, self._clock())
            accepted = accept(connection, items, now_s, teaches=poll.teaches)
            keep_cursor(
                connection,
                self.source.name,
                self.kind,
                poll.cursor,
                self._clock(),
                last_error=faults[-1] if faults else poll.stopped,
                stopped=poll.stopped,
                not_before_s=poll.retry_at_s,
            )
        for sentence in faults:
            log.warning("item_left_out", source=self.source.name, reason=sentence)
        if accepted.new or accepted.revised:
            log.info(
                "items_accepted",
                source=self.source.name,
                new=accepted.new,
                revised=accepted.revised,
                known=accepted.known,
                teaches=poll.teaches,
            )
        return accepted, faults

    def taken_in(self, poll: Poll) -> tuple[list[Item], tuple[str, ...]]:
        """A poll's items through intake; one that fails costs itself alone."""
        items, faults = [], list(poll.faults)
        now_s = self._clock()
        for raw in poll.items:
            try:
                items.append(take_in(raw, self.source.name, now_s))
            except RejectedItemError as error:
                faults.append(str(error))
        return items, tuple(faults)

    def _failed(self, error: SourceError, accepted: Accepted, faults: tuple[str, ...]) -> Polled:
        now_s = self._clock()
        with self.database.write() as connection:
            failures = note_failure(
                connection, self.source.name, self.kind, now_s, str(error), error.retry_at_s
            )
        log.warning("poll_failed", source=self.source.name, failures=failures, reason=str(error))
        next_s = next_poll_s(now_s, self.every_s, failures, self._rng, error.retry_at_s)
        return Polled(accepted, faults, next_s, str(error))
