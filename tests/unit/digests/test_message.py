"""A digest as an outgoing mail."""

from dataclasses import replace

from vanner.digests import ComposedDigest, digest_message
from vanner.records import DigestContent

CONTENT = DigestContent(
    desk="metro",
    schedule="0 7 * * *",
    local_slot="2026-03-04T07:00",
    timezone="UTC",
    scheduled_s=1_772_604_000.0,
    covers_from_s=1_772_560_800.0,
    covers_until_s=1_772_604_000.0,
    raised=(),
    noted=(),
    cleared=(),
    volumes=(),
)
COMPOSED = ComposedDigest("subject", "text", "<p>html</p>")


def message(**changes):
    return digest_message(replace(CONTENT, **changes), COMPOSED, ("a@example.org",), 5.0)


def test_it_carries_the_composed_texts_to_the_recipients():
    made = message()
    assert (made.subject, made.body_text, made.body_html) == ("subject", "text", "<p>html</p>")
    assert (made.desk, made.recipients, made.created_s) == ("metro", ("a@example.org",), 5.0)


def test_it_is_stale_a_day_after_its_slot_however_late_it_was_made():
    assert message().not_after_s == 1_772_604_000.0 + 86_400.0


def test_desk_schedule_and_slot_make_the_key_and_nothing_else_does():
    key = message().key
    assert key.startswith("digest-metro-2026-03-04T0700-")
    assert message(covers_from_s=0.0, scheduled_s=9.0).key == key
    others = [
        message(desk="Metro"),
        message(schedule="0 7 * * 3"),
        message(local_slot="2026-03-05T07:00"),
    ]
    assert len({key, *(other.key for other in others)}) == 4
