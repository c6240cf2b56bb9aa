"""The tables. Names are singular; the public views over them, defined by the migrations, plural.

Times are Unix seconds (UTC) in columns ending in `_s`. A test migrates an empty database and
finds no difference to what is written here.
"""

from __future__ import annotations

from sqlalchemy import (
    Boolean,
    Column,
    Float,
    ForeignKey,
    Index,
    Integer,
    LargeBinary,
    MetaData,
    String,
    Table,
    Text,
    UniqueConstraint,
)

metadata = MetaData()

# One row. `closed_s`: end of the last pulse that takes no more items. `read_s`: end of the
# last pulse whose results are committed. `purpose`: what the database serves.
clock = Table(
    "clock",
    metadata,
    Column("clock_id", Integer, primary_key=True),
    Column("pulse_s", Float, nullable=False),
    Column("closed_s", Float, nullable=False),
    Column("read_s", Float, nullable=False),
    Column("purpose", String(16), nullable=False),
)

source_state = Table(
    "source_state",
    metadata,
    Column("source", String(64), primary_key=True),
    Column("kind", String(16), nullable=False),
    Column("cursor", Text, nullable=False),
    Column("last_polled_s", Float),
    Column("not_before_s", Float),
    Column("failures", Integer, nullable=False),
    Column("last_error", Text),
    Column("stopped", Text),
)

item = Table(
    "item",
    metadata,
    Column("item_id", Integer, primary_key=True),
    Column("source", String(64), nullable=False),
    Column("guid", Text, nullable=False),
    Column("received_s", Float, nullable=False),
    Column("latest_revision", Integer, nullable=False),
    UniqueConstraint("source", "guid", name="item_key"),
    Index("item_source_received", "source", "received_s"),
)

item_revision = Table(
    "item_revision",
    metadata,
    Column("item_id", Integer, ForeignKey("item.item_id"), primary_key=True),
    Column("revision", Integer, primary_key=True),
    Column("received_s", Float, nullable=False),
    Column("title", Text, nullable=False),
    Column("content_text", Text, nullable=False),
    Column("url", Text),
    Column("language", Text),
    Column("date_raw", Text),
    Column("published_s", Float, nullable=False),
    Column("date_credible", Boolean, nullable=False),
    Column("content_digest", String(64), nullable=False),
    Column("teaches", Boolean, nullable=False),
    Index("item_revision_received", "received_s", "item_id"),
)

reading = Table(
    "reading",
    metadata,
    Column("desk", String(64), primary_key=True),
    Column("item_id", Integer, ForeignKey("item.item_id"), primary_key=True),
    Column("words", Integer, nullable=False),
    Column("standing", Float, nullable=False),
    Column("running", Float, nullable=False),
    Column("house", Float, nullable=False),
    Column("own", Float, nullable=False),
    Column("bits_per_word", Float, nullable=False),
    sqlite_with_rowid=False,
)

topic = Table(
    "topic",
    metadata,
    Column("desk", String(64), primary_key=True),
    Column("item_id", Integer, ForeignKey("item.item_id"), primary_key=True),
    Column("term", Text, primary_key=True),
    Column("weight", Float, nullable=False),
    Column("own_share", Float, nullable=False),
    Column("count", Integer, nullable=False),
    Index("topic_term", "desk", "term"),
    sqlite_with_rowid=False,
)

story = Table(
    "story",
    metadata,
    Column("story_id", Integer, primary_key=True),
    Column("desk", String(64), nullable=False),
    Column("number", Integer, nullable=False),
    Column("noted_s", Float, nullable=False),
    Column("raised_s", Float),
    Column("last_activity_s", Float, nullable=False),
    Column("cleared_s", Float),
    Column("headline_item_id", Integer, ForeignKey("item.item_id"), nullable=False),
    Column("bits", Float, nullable=False),
    Column("threshold_bits", Float, nullable=False),
    UniqueConstraint("desk", "number", name="story_key"),
    Index("story_raised", "desk", "raised_s"),
    Index("story_noted", "desk", "noted_s"),
)

story_term = Table(
    "story_term",
    metadata,
    Column("story_id", Integer, ForeignKey("story.story_id"), primary_key=True),
    Column("term", Text, primary_key=True),
    Column("bits", Float, nullable=False),
    Column("seen", Integer, nullable=False),
    Column("expected", Float, nullable=False),
    Column("joined_s", Float, nullable=False),
)

story_item = Table(
    "story_item",
    metadata,
    Column("story_id", Integer, ForeignKey("story.story_id"), primary_key=True),
    Column("item_id", Integer, ForeignKey("item.item_id"), primary_key=True),
    Column("added_s", Float, nullable=False),
    Index("story_item_item", "item_id"),
)

# When a desk began, and the model's state at some pulse, from which the pulses after it can
# be derived again. `parameters` are those under which the state was made.
desk_state = Table(
    "desk_state",
    metadata,
    Column("desk", String(64), primary_key=True),
    Column("started_s", Float, nullable=False),
    Column("checkpoint_s", Float),
    Column("parameters", Text),
    Column("state_version", Integer),
    Column("state", LargeBinary),
)

digest = Table(
    "digest",
    metadata,
    Column("digest_id", Integer, primary_key=True),
    Column("desk", String(64), nullable=False),
    Column("schedule", String(64), nullable=False),
    Column("local_slot", String(16), nullable=False),
    Column("scheduled_s", Float, nullable=False),
    Column("covers_from_s", Float, nullable=False),
    Column("covers_until_s", Float, nullable=False),
    Column("subject", Text, nullable=False),
    Column("body_text", Text, nullable=False),
    Column("body_html", Text, nullable=False),
    Column("filed", Boolean, nullable=False),
    UniqueConstraint("desk", "schedule", "local_slot", name="digest_slot"),
)

# Outgoing mail. `state`: queued, sending, sent, refused, stale, unconfirmed or withheld.
message = Table(
    "message",
    metadata,
    Column("key", Text, primary_key=True),
    Column("desk", String(64), nullable=False),
    Column("recipients", Text, nullable=False),
    Column("subject", Text, nullable=False),
    Column("body_text", Text, nullable=False),
    Column("body_html", Text, nullable=False),
    Column("headers", Text, nullable=False),
    Column("created_s", Float, nullable=False),
    Column("not_after_s", Float),
    Column("state", String(16), nullable=False),
    Column("attempts", Integer, nullable=False),
    Column("next_try_s", Float, nullable=False),
    Column("last_error", Text),
    Column("sent_s", Float),
    Index("message_state", "state", "next_try_s"),
)
