"""What a digest says, as the database stands at its scheduled time, and keeping digests.

The engine makes a digest between the pulses before and after its time, so that what is in the
database then is what the digest should say, even where it is made late.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sqlalchemy import Connection, Integer, and_, func, insert, select, update

from vanner.clock import DAY_S
from vanner.records import SourceVolume, StoryLine
from vanner.store.schema import digest, item, item_revision, story
from vanner.store.stories import story_lines

USUAL_DAYS = 14.0
# A source is called quiet when it brought nothing though its usual rate promised this many.
QUIET_EXPECTED = 5.0


@dataclass(frozen=True, slots=True)
class DigestRow:
    """A digest to be stored."""

    desk: str
    schedule: str
    local_slot: str
    scheduled_s: float
    covers_from_s: float
    covers_until_s: float
    subject: str
    body_text: str
    body_html: str


def latest_slot_s(connection: Connection, desk: str, before_s: float) -> float | None:
    """When a desk's latest digest before a time was due, whatever its schedule, or None."""
    return connection.execute(
        select(func.max(digest.c.scheduled_s)).where(
            digest.c.desk == desk, digest.c.scheduled_s < before_s
        )
    ).scalar()


def has_slot(connection: Connection, desk: str, schedule: str, local_slot: str) -> bool:
    """Whether that slot's digest exists."""
    query = select(digest.c.digest_id).where(
        digest.c.desk == desk,
        digest.c.schedule == schedule,
        digest.c.local_slot == local_slot,
    )
    return connection.execute(query).scalar() is not None


def raised_between(
    connection: Connection, desk: str, from_s: float, until_s: float
) -> list[StoryLine]:
    """A desk's alerts raised in (from_s, until_s], oldest first."""
    return story_lines(
        connection,
        until_s,
        and_(story.c.desk == desk, story.c.raised_s > from_s, story.c.raised_s <= until_s),
        story.c.raised_s,
        story.c.story_id,
    )


def noted_between(
    connection: Connection, desk: str, from_s: float, until_s: float
) -> list[StoryLine]:
    """Stories noted in (from_s, until_s] and not raised, most bits first."""
    return story_lines(
        connection,
        until_s,
        and_(
            story.c.desk == desk,
            story.c.noted_s > from_s,
            story.c.noted_s <= until_s,
            story.c.raised_s.is_(None),
        ),
        story.c.bits.desc(),
        story.c.story_id,
    )


def cleared_between(
    connection: Connection, desk: str, from_s: float, until_s: float
) -> list[StoryLine]:
    """A desk's alerts that cleared in (from_s, until_s], oldest first."""
    return story_lines(
        connection,
        until_s,
        and_(
            story.c.desk == desk,
            story.c.raised_s.is_not(None),
            story.c.cleared_s > from_s,
            story.c.cleared_s <= until_s,
        ),
        story.c.cleared_s,
        story.c.story_id,
    )


def volumes_between(
    connection: Connection, sources: Sequence[str], from_s: float, until_s: float
) -> list[SourceVolume]:
    """Each source's items received in [from_s, until_s) beside its usual number.

    The usual number is its mean over the 14 days before, scaled to the digest's length. It is
    None for a source that is known for less than that length (or, where that is longer, for
    less than 14 days): a few minutes tell nothing about a day. Items that only teach are no
    part of it: an archive is taught at once and says nothing about how much usually comes.
    """
    return [_volume(connection, source, from_s, until_s) for source in sources]


def _volume(connection: Connection, source: str, from_s: float, until_s: float) -> SourceVolume:
    received = item.c.received_s
    before_s = from_s - USUAL_DAYS * DAY_S
    counts = (received >= before_s) & (received < from_s) & item_revision.c.teaches.is_(False)
    first_s, last_s, now, earlier = connection.execute(
        select(
            func.min(received),
            func.max(received),
            func.coalesce(func.sum(received >= from_s, type_=Integer), 0),
            func.coalesce(func.sum(counts, type_=Integer), 0),
        )
        .join(
            item_revision,
            (item_revision.c.item_id == item.c.item_id) & (item_revision.c.revision == 1),
        )
        .where(item.c.source == source, received < until_s)
    ).one()
    usual = None
    covered_s = 0.0 if first_s is None else from_s - max(first_s, before_s)
    if covered_s > 0 and covered_s >= min(until_s - from_s, USUAL_DAYS * DAY_S):
        usual = earlier * (until_s - from_s) / covered_s
    quiet = now == 0 and usual is not None and usual >= QUIET_EXPECTED
    return SourceVolume(source, int(now), usual, last_s, quiet)


def keep_digest(connection: Connection, row: DigestRow, *, filed: bool) -> int:
    """Store a digest under its slot, which must be free; its number.

    Args:
        connection: A write transaction.
        row: The digest.
        filed: Whether its file counts as written already (a rebuilt database files nothing).
    """
    result = connection.execute(
        insert(digest).values(
            desk=row.desk,
            schedule=row.schedule,
            local_slot=row.local_slot,
            scheduled_s=row.scheduled_s,
            covers_from_s=row.covers_from_s,
            covers_until_s=row.covers_until_s,
            subject=row.subject,
            body_text=row.body_text,
            body_html=row.body_html,
            filed=filed,
        )
    )
    return int(result.lastrowid)


def unfiled(connection: Connection) -> list[tuple[int, DigestRow]]:
    """Digests that have not been written to their desk's folder yet, oldest first."""
    rows = connection.execute(
        select(digest).where(digest.c.filed.is_(False)).order_by(digest.c.digest_id)
    )
    return [(row.digest_id, _digest_row(row)) for row in rows]


def latest_digest(connection: Connection, desk: str) -> DigestRow | None:
    """A desk's most recent digest, or None."""
    row = connection.execute(
        select(digest).where(digest.c.desk == desk).order_by(digest.c.scheduled_s.desc()).limit(1)
    ).one_or_none()
    return None if row is None else _digest_row(row)


def _digest_row(row: object) -> DigestRow:
    names = DigestRow.__dataclass_fields__
    return DigestRow(**{name: getattr(row, name) for name in names})


def mark_filed(connection: Connection, digest_id: int) -> None:
    """Note that a digest's file was written."""
    connection.execute(update(digest).where(digest.c.digest_id == digest_id).values(filed=True))
