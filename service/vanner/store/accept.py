"""Accepting items: once accepted, nothing is lost; the key (source, guid) decides what is new."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sqlalchemy import Connection, bindparam, insert, select, update

from vanner.records import Item
from vanner.store.schema import clock, item, item_revision

_KEYS_A_QUERY = 500


@dataclass(frozen=True, slots=True)
class Accepted:
    """What became of a batch: new items, new revisions of known ones, and known texts."""

    new: int = 0
    revised: int = 0
    known: int = 0

    def __add__(self, other: Accepted) -> Accepted:
        """The sum of two batches."""
        return Accepted(
            self.new + other.new, self.revised + other.revised, self.known + other.known
        )


def receive_time_s(connection: Connection, now_s: float) -> float:
    """When an item accepted now counts as received: never within a pulse that has closed.

    A clock that was set back, or a pulse that closed between reading the clock and this
    transaction, would otherwise slip items into a pulse whose results are committed.
    """
    closed_s = connection.execute(select(clock.c.closed_s)).scalar()
    return now_s if closed_s is None else max(now_s, closed_s)


def accept(
    connection: Connection,
    items: Sequence[Item],
    received_s: float | None,
    *,
    teaches: bool,
) -> Accepted:
    """Store items under their keys.

    Args:
        connection: A write transaction.
        items: What passed intake; the same key twice counts as a revision of itself.
        received_s: The time of receipt of them all, or None to take each one's published time
            (an archive that is replayed).
        teaches: Whether they teach the background only.

    Returns:
        How many were new, revised and known.
    """
    counts = Accepted()
    fresh: dict[tuple[str, str], Item] = {}
    later: list[Item] = []
    for one in items:
        key = (one.source, one.guid)
        if key in fresh:
            later.append(one)
        else:
            fresh[key] = one
    known = _known(connection, list(fresh))
    new = [one for key, one in fresh.items() if key not in known]
    _insert(connection, new, received_s, teaches=teaches)
    counts += Accepted(new=len(new))
    for key, one in fresh.items():
        if key in known:
            counts += _revise(connection, known[key], one, received_s, teaches=teaches)
    for one in later:
        number = _known(connection, [(one.source, one.guid)])[one.source, one.guid]
        counts += _revise(connection, number, one, received_s, teaches=teaches)
    return counts


def _known(
    connection: Connection, keys: Sequence[tuple[str, str]]
) -> dict[tuple[str, str], tuple[int, int, str, float]]:
    """(item id, latest revision, its digest and time of receipt) of those keys that exist."""
    query = (
        select(
            item.c.source,
            item.c.guid,
            item.c.item_id,
            item.c.latest_revision,
            item_revision.c.content_digest,
            item_revision.c.received_s,
        )
        .join(
            item_revision,
            (item_revision.c.item_id == item.c.item_id)
            & (item_revision.c.revision == item.c.latest_revision),
        )
        .where(item.c.source == bindparam("s"))
        .where(item.c.guid.in_(bindparam("g", expanding=True)))
    )
    found = {}
    by_source: dict[str, list[str]] = {}
    for source, guid in keys:
        by_source.setdefault(source, []).append(guid)
    for source, guids in by_source.items():
        for start in range(0, len(guids), _KEYS_A_QUERY):
            rows = connection.execute(
                query, {"s": source, "g": guids[start : start + _KEYS_A_QUERY]}
            )
            found.update({(row[0], row[1]): (row[2], row[3], row[4], row[5]) for row in rows})
    return found


def _revision_row(
    item_id: int, revision: int, one: Item, received_s: float | None, *, teaches: bool
) -> dict[str, object]:
    return {
        "item_id": item_id,
        "revision": revision,
        "received_s": one.published_s if received_s is None else received_s,
        "title": one.title,
        "content_text": one.content_text,
        "url": one.url,
        "language": one.language,
        "date_raw": one.date_raw,
        "published_s": one.published_s,
        "date_credible": one.date_credible,
        "content_digest": one.content_digest,
        "teaches": teaches,
    }


def _insert(
    connection: Connection, new: Sequence[Item], received_s: float | None, *, teaches: bool
) -> None:
    if not new:
        return
    highest = connection.execute(select(item.c.item_id).order_by(item.c.item_id.desc()).limit(1))
    first = (highest.scalar() or 0) + 1
    rows = [
        _revision_row(first + place, 1, one, received_s, teaches=teaches)
        for place, one in enumerate(new)
    ]
    connection.execute(
        insert(item),
        [
            {
                "item_id": row["item_id"],
                "source": one.source,
                "guid": one.guid,
                "received_s": row["received_s"],
                "latest_revision": 1,
            }
            for row, one in zip(rows, new, strict=True)
        ],
    )
    connection.execute(insert(item_revision), rows)


def _revise(
    connection: Connection,
    known: tuple[int, int, str, float],
    one: Item,
    received_s: float | None,
    *,
    teaches: bool,
) -> Accepted:
    item_id, latest, digest, before_s = known
    if digest == one.content_digest:
        return Accepted(known=1)
    # In an archive out of order a later revision may bear an earlier date.
    time_s = max(before_s, one.published_s if received_s is None else received_s)
    row = _revision_row(item_id, latest + 1, one, time_s, teaches=teaches)
    connection.execute(insert(item_revision), row)
    connection.execute(
        update(item).where(item.c.item_id == item_id).values(latest_revision=latest + 1)
    )
    return Accepted(revised=1)
