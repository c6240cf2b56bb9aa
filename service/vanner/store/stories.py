"""Stories and items as a person sees them: for mails, digests and the terminal."""

from __future__ import annotations

from sqlalchemy import ColumnElement, Connection, Row, func, select

from vanner.records import ItemLine, StoryLine, StoryTerm
from vanner.store.schema import item, item_revision, story, story_item, story_term

ITEMS_SHOWN = 12
_TITLE_CHARACTERS = 120


def _headline(title: str, text: str) -> str:
    return title or " ".join(text[:_TITLE_CHARACTERS].split())


def _state(row: Row[tuple[object, ...]]) -> str:
    if row.raised_s is None:
        return "noted"
    return "raised" if row.cleared_s is None else "cleared"


def _revision_then(as_of_s: float) -> ColumnElement[bool]:
    """Joins an item to the revision that was its latest at a time."""
    earlier = item_revision.alias()
    latest = (
        select(func.max(earlier.c.revision))
        .where(earlier.c.item_id == item.c.item_id, earlier.c.received_s < as_of_s)
        .scalar_subquery()
    )
    return (item_revision.c.item_id == item.c.item_id) & (item_revision.c.revision == latest)


def story_lines(
    connection: Connection,
    as_of_s: float,
    condition: ColumnElement[bool],
    *order: ColumnElement[object],
    limit: int | None = None,
) -> list[StoryLine]:
    """Stories that fulfil a condition, each with its terms and newest items.

    Args:
        connection: Any connection.
        as_of_s: Items are shown as received before this time: what is made late must not show
            revisions that came after its time.
        condition: Over the columns of `schema.story`.
        order: What to sort by.
        limit: How many at most.
    """
    query = (
        select(story, item_revision.c.title, item_revision.c.content_text)
        .join(item, item.c.item_id == story.c.headline_item_id)
        .join(item_revision, _revision_then(as_of_s))
        .where(condition)
        .order_by(*order)
        .limit(limit)
    )
    return [_line(connection, row, as_of_s) for row in connection.execute(query).all()]


def story_line(connection: Connection, story_id: int, as_of_s: float) -> StoryLine:
    """One story, which must exist, with its items as received before a time."""
    (line,) = story_lines(connection, as_of_s, story.c.story_id == story_id)
    return line


def _line(connection: Connection, row: Row[tuple[object, ...]], as_of_s: float) -> StoryLine:
    items, count, sources = _items(connection, row.story_id, as_of_s)
    return StoryLine(
        story_id=row.story_id,
        desk=row.desk,
        state=_state(row),
        noted_s=row.noted_s,
        raised_s=row.raised_s,
        cleared_s=row.cleared_s,
        last_activity_s=row.last_activity_s,
        headline=_headline(row.title, row.content_text),
        bits=row.bits,
        item_count=count,
        source_count=sources,
        terms=_terms(connection, row.story_id),
        items=items,
    )


def _terms(connection: Connection, story_id: int) -> tuple[StoryTerm, ...]:
    query = (
        select(
            story_term.c.term,
            story_term.c.bits,
            story_term.c.seen,
            story_term.c.expected,
            story_term.c.joined_s,
        )
        .where(story_term.c.story_id == story_id)
        .order_by(story_term.c.bits.desc(), story_term.c.term)
    )
    return tuple(StoryTerm(*row) for row in connection.execute(query))


def _items(
    connection: Connection, story_id: int, as_of_s: float
) -> tuple[tuple[ItemLine, ...], int, int]:
    chosen = story_item.c.story_id == story_id
    count, sources = connection.execute(
        select(func.count(), func.count(item.c.source.distinct()))
        .select_from(story_item.join(item, item.c.item_id == story_item.c.item_id))
        .where(chosen)
    ).one()
    query = (
        select(
            item.c.item_id,
            item.c.guid,
            item.c.source,
            item_revision.c.title,
            item_revision.c.content_text,
            item_revision.c.url,
            item_revision.c.published_s,
        )
        .select_from(story_item)
        .join(item, item.c.item_id == story_item.c.item_id)
        .join(item_revision, _revision_then(as_of_s))
        .where(chosen)
        .order_by(story_item.c.added_s.desc(), item.c.item_id.desc())
        .limit(ITEMS_SHOWN)
    )
    rows = connection.execute(query).all()
    lines = [
        ItemLine(
            row.item_id,
            row.guid,
            row.source,
            _headline(row.title, row.content_text),
            row.url,
            row.published_s,
        )
        for row in reversed(rows)
    ]
    return tuple(lines), count, sources


def raised_guids(connection: Connection) -> dict[int, tuple[str, frozenset[str]]]:
    """Alert id -> (desk, guids of its items), for every alert."""
    query = (
        select(story.c.story_id, story.c.desk, item.c.guid)
        .join(story_item, story_item.c.story_id == story.c.story_id)
        .join(item, item.c.item_id == story_item.c.item_id)
        .where(story.c.raised_s.is_not(None))
    )
    found: dict[int, tuple[str, set[str]]] = {}
    for row in connection.execute(query):
        found.setdefault(row.story_id, (row.desk, set()))[1].add(row.guid)
    return {key: (desk, frozenset(guids)) for key, (desk, guids) in found.items()}
