"""The first schema: tables, and the public views over them."""

import sqlalchemy as sa
from alembic import op

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None


def _utc(column: str) -> str:
    """SQL for Unix seconds as ISO 8601 UTC text in whole seconds."""
    return f"strftime('%Y-%m-%dT%H:%M:%SZ', {column}, 'unixepoch')"


HEADLINE = "coalesce(nullif(r.title, ''), substr(r.content_text, 1, 120))"

STORY_COLUMNS = f"""
    {HEADLINE} AS headline,
    s.bits,
    (SELECT count(*) FROM story_item si WHERE si.story_id = s.story_id) AS items,
    (SELECT count(DISTINCT i.source) FROM story_item si JOIN item i ON i.item_id = si.item_id
        WHERE si.story_id = s.story_id) AS sources
    FROM story s
    JOIN item h ON h.item_id = s.headline_item_id
    JOIN item_revision r ON r.item_id = h.item_id AND r.revision = h.latest_revision
"""

VIEWS = {
    "alerts": f"""
        SELECT s.story_id AS alert_id, s.desk,
            CASE WHEN s.cleared_s IS NULL THEN 'raised' ELSE 'cleared' END AS state,
            {_utc("s.raised_s")} AS raised_at,
            {_utc("s.last_activity_s")} AS last_activity_at,
            {STORY_COLUMNS}
        WHERE s.raised_s IS NOT NULL
    """,
    "noted": f"""
        SELECT s.story_id, s.desk,
            {_utc("s.noted_s")} AS noted_at,
            {_utc("s.last_activity_s")} AS last_activity_at,
            {STORY_COLUMNS}
        WHERE s.raised_s IS NULL
    """,
    "alert_terms": f"""
        SELECT t.story_id AS alert_id, t.term, t.bits, t.seen, t.expected,
            {_utc("t.joined_s")} AS joined_at
        FROM story_term t JOIN story s ON s.story_id = t.story_id
        WHERE s.raised_s IS NOT NULL
    """,
    "alert_items": f"""
        SELECT si.story_id AS alert_id, {_utc("si.added_s")} AS added_at,
            i.item_id, i.guid, i.source, r.title, r.url,
            {_utc("r.published_s")} AS published_at
        FROM story_item si
        JOIN story s ON s.story_id = si.story_id
        JOIN item i ON i.item_id = si.item_id
        JOIN item_revision r ON r.item_id = i.item_id AND r.revision = i.latest_revision
        WHERE s.raised_s IS NOT NULL
    """,
    "items": f"""
        SELECT i.item_id, i.source, i.guid, r.title, r.url, r.language,
            {_utc("r.published_s")} AS published_at,
            {_utc("i.received_s")} AS received_at,
            CASE WHEN i.received_s >= (SELECT read_s FROM clock) THEN 'waiting'
                WHEN r.teaches THEN 'taught' ELSE 'read' END AS status
        FROM item i
        JOIN item_revision r ON r.item_id = i.item_id AND r.revision = i.latest_revision
    """,
    "item_topics": """
        SELECT desk, item_id, term, weight, own_share, "count" FROM topic
    """,
    "readings": """
        SELECT desk, item_id, words, standing, running, house, own, bits_per_word FROM reading
    """,
    "term_hours": """
        SELECT t.desk, t.term,
            strftime('%Y-%m-%dT%H:00:00Z', i.received_s, 'unixepoch') AS hour,
            count(*) AS items
        FROM topic t
        JOIN item i ON i.item_id = t.item_id
        JOIN item_revision r ON r.item_id = i.item_id AND r.revision = 1
        WHERE t.own_share >= 0.5 AND NOT r.teaches
        GROUP BY t.desk, t.term, hour
    """,
    "source_health": f"""
        SELECT s.source, s.kind,
            {_utc("s.last_polled_s")} AS last_polled_at,
            {_utc("(SELECT max(i.received_s) FROM item i WHERE i.source = s.source)")}
                AS last_item_at,
            (SELECT count(*) FROM item i WHERE i.source = s.source
                AND i.received_s >= (SELECT read_s FROM clock) - 86400
                AND i.received_s < (SELECT read_s FROM clock)) AS items_24h,
            s.failures, s.last_error
        FROM source_state s
    """,
    "digests": f"""
        SELECT digest_id, desk,
            {_utc("scheduled_s")} AS scheduled_for,
            {_utc("covers_from_s")} AS covers_from,
            {_utc("covers_until_s")} AS covers_until,
            subject, body_text
        FROM digest
    """,
}


def upgrade() -> None:
    _make_tables()
    for name, query in VIEWS.items():
        op.execute(f"CREATE VIEW {name} AS {query}")


def downgrade() -> None:
    """A database is never taken back: restore a backup instead."""
    raise NotImplementedError


def _make_tables() -> None:
    op.create_table(
        "clock",
        sa.Column("clock_id", sa.Integer(), nullable=False),
        sa.Column("pulse_s", sa.Float(), nullable=False),
        sa.Column("closed_s", sa.Float(), nullable=False),
        sa.Column("read_s", sa.Float(), nullable=False),
        sa.Column("purpose", sa.String(length=16), nullable=False),
        sa.PrimaryKeyConstraint("clock_id"),
    )
    op.create_table(
        "desk_state",
        sa.Column("desk", sa.String(length=64), nullable=False),
        sa.Column("started_s", sa.Float(), nullable=False),
        sa.Column("checkpoint_s", sa.Float(), nullable=True),
        sa.Column("parameters", sa.Text(), nullable=True),
        sa.Column("state_version", sa.Integer(), nullable=True),
        sa.Column("state", sa.LargeBinary(), nullable=True),
        sa.PrimaryKeyConstraint("desk"),
    )
    op.create_table(
        "digest",
        sa.Column("digest_id", sa.Integer(), nullable=False),
        sa.Column("desk", sa.String(length=64), nullable=False),
        sa.Column("schedule", sa.String(length=64), nullable=False),
        sa.Column("local_slot", sa.String(length=16), nullable=False),
        sa.Column("scheduled_s", sa.Float(), nullable=False),
        sa.Column("covers_from_s", sa.Float(), nullable=False),
        sa.Column("covers_until_s", sa.Float(), nullable=False),
        sa.Column("subject", sa.Text(), nullable=False),
        sa.Column("body_text", sa.Text(), nullable=False),
        sa.Column("body_html", sa.Text(), nullable=False),
        sa.Column("filed", sa.Boolean(), nullable=False),
        sa.PrimaryKeyConstraint("digest_id"),
        sa.UniqueConstraint("desk", "schedule", "local_slot", name="digest_slot"),
    )
    op.create_table(
        "item",
        sa.Column("item_id", sa.Integer(), nullable=False),
        sa.Column("source", sa.String(length=64), nullable=False),
        sa.Column("guid", sa.Text(), nullable=False),
        sa.Column("received_s", sa.Float(), nullable=False),
        sa.Column("latest_revision", sa.Integer(), nullable=False),
        sa.PrimaryKeyConstraint("item_id"),
        sa.UniqueConstraint("source", "guid", name="item_key"),
    )
    op.create_index("item_source_received", "item", ["source", "received_s"], unique=False)
    op.create_table(
        "message",
        sa.Column("key", sa.Text(), nullable=False),
        sa.Column("desk", sa.String(length=64), nullable=False),
        sa.Column("recipients", sa.Text(), nullable=False),
        sa.Column("subject", sa.Text(), nullable=False),
        sa.Column("body_text", sa.Text(), nullable=False),
        sa.Column("body_html", sa.Text(), nullable=False),
        sa.Column("headers", sa.Text(), nullable=False),
        sa.Column("created_s", sa.Float(), nullable=False),
        sa.Column("not_after_s", sa.Float(), nullable=True),
        sa.Column("state", sa.String(length=16), nullable=False),
        sa.Column("attempts", sa.Integer(), nullable=False),
        sa.Column("next_try_s", sa.Float(), nullable=False),
        sa.Column("last_error", sa.Text(), nullable=True),
        sa.Column("sent_s", sa.Float(), nullable=True),
        sa.PrimaryKeyConstraint("key"),
    )
    op.create_index("message_state", "message", ["state", "next_try_s"], unique=False)
    op.create_table(
        "source_state",
        sa.Column("source", sa.String(length=64), nullable=False),
        sa.Column("kind", sa.String(length=16), nullable=False),
        sa.Column("cursor", sa.Text(), nullable=False),
        sa.Column("last_polled_s", sa.Float(), nullable=True),
        sa.Column("not_before_s", sa.Float(), nullable=True),
        sa.Column("failures", sa.Integer(), nullable=False),
        sa.Column("last_error", sa.Text(), nullable=True),
        sa.Column("stopped", sa.Text(), nullable=True),
        sa.PrimaryKeyConstraint("source"),
    )
    op.create_table(
        "item_revision",
        sa.Column("item_id", sa.Integer(), nullable=False),
        sa.Column("revision", sa.Integer(), nullable=False),
        sa.Column("received_s", sa.Float(), nullable=False),
        sa.Column("title", sa.Text(), nullable=False),
        sa.Column("content_text", sa.Text(), nullable=False),
        sa.Column("url", sa.Text(), nullable=True),
        sa.Column("language", sa.Text(), nullable=True),
        sa.Column("date_raw", sa.Text(), nullable=True),
        sa.Column("published_s", sa.Float(), nullable=False),
        sa.Column("date_credible", sa.Boolean(), nullable=False),
        sa.Column("content_digest", sa.String(length=64), nullable=False),
        sa.Column("teaches", sa.Boolean(), nullable=False),
        sa.ForeignKeyConstraint(
            ["item_id"],
            ["item.item_id"],
        ),
        sa.PrimaryKeyConstraint("item_id", "revision"),
    )
    op.create_index(
        "item_revision_received", "item_revision", ["received_s", "item_id"], unique=False
    )
    op.create_table(
        "reading",
        sa.Column("desk", sa.String(length=64), nullable=False),
        sa.Column("item_id", sa.Integer(), nullable=False),
        sa.Column("words", sa.Integer(), nullable=False),
        sa.Column("standing", sa.Float(), nullable=False),
        sa.Column("running", sa.Float(), nullable=False),
        sa.Column("house", sa.Float(), nullable=False),
        sa.Column("own", sa.Float(), nullable=False),
        sa.Column("bits_per_word", sa.Float(), nullable=False),
        sa.ForeignKeyConstraint(
            ["item_id"],
            ["item.item_id"],
        ),
        sa.PrimaryKeyConstraint("desk", "item_id"),
        sqlite_with_rowid=False,
    )
    op.create_table(
        "story",
        sa.Column("story_id", sa.Integer(), nullable=False),
        sa.Column("desk", sa.String(length=64), nullable=False),
        sa.Column("number", sa.Integer(), nullable=False),
        sa.Column("noted_s", sa.Float(), nullable=False),
        sa.Column("raised_s", sa.Float(), nullable=True),
        sa.Column("last_activity_s", sa.Float(), nullable=False),
        sa.Column("cleared_s", sa.Float(), nullable=True),
        sa.Column("headline_item_id", sa.Integer(), nullable=False),
        sa.Column("bits", sa.Float(), nullable=False),
        sa.Column("threshold_bits", sa.Float(), nullable=False),
        sa.ForeignKeyConstraint(
            ["headline_item_id"],
            ["item.item_id"],
        ),
        sa.PrimaryKeyConstraint("story_id"),
        sa.UniqueConstraint("desk", "number", name="story_key"),
    )
    op.create_index("story_noted", "story", ["desk", "noted_s"], unique=False)
    op.create_index("story_raised", "story", ["desk", "raised_s"], unique=False)
    op.create_table(
        "topic",
        sa.Column("desk", sa.String(length=64), nullable=False),
        sa.Column("item_id", sa.Integer(), nullable=False),
        sa.Column("term", sa.Text(), nullable=False),
        sa.Column("weight", sa.Float(), nullable=False),
        sa.Column("own_share", sa.Float(), nullable=False),
        sa.Column("count", sa.Integer(), nullable=False),
        sa.ForeignKeyConstraint(
            ["item_id"],
            ["item.item_id"],
        ),
        sa.PrimaryKeyConstraint("desk", "item_id", "term"),
        sqlite_with_rowid=False,
    )
    op.create_index("topic_term", "topic", ["desk", "term"], unique=False)
    op.create_table(
        "story_item",
        sa.Column("story_id", sa.Integer(), nullable=False),
        sa.Column("item_id", sa.Integer(), nullable=False),
        sa.Column("added_s", sa.Float(), nullable=False),
        sa.ForeignKeyConstraint(
            ["item_id"],
            ["item.item_id"],
        ),
        sa.ForeignKeyConstraint(
            ["story_id"],
            ["story.story_id"],
        ),
        sa.PrimaryKeyConstraint("story_id", "item_id"),
    )
    op.create_index("story_item_item", "story_item", ["item_id"], unique=False)
    op.create_table(
        "story_term",
        sa.Column("story_id", sa.Integer(), nullable=False),
        sa.Column("term", sa.Text(), nullable=False),
        sa.Column("bits", sa.Float(), nullable=False),
        sa.Column("seen", sa.Integer(), nullable=False),
        sa.Column("expected", sa.Float(), nullable=False),
        sa.Column("joined_s", sa.Float(), nullable=False),
        sa.ForeignKeyConstraint(
            ["story_id"],
            ["story.story_id"],
        ),
        sa.PrimaryKeyConstraint("story_id", "term"),
    )
