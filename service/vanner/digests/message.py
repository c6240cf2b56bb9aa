"""A digest as an outgoing mail."""

from __future__ import annotations

import hashlib

from vanner.alerts.wording import slug
from vanner.clock import DAY_S
from vanner.digests.compose import ComposedDigest
from vanner.records import DigestContent, Message


def digest_message(
    content: DigestContent,
    composed: ComposedDigest,
    recipients: tuple[str, ...],
    created_s: float,
) -> Message:
    """The mail of a digest: one for each desk, schedule and slot, stale a day after its time.

    Args:
        content: What the digest says.
        composed: The same as text.
        recipients: Who is to get it.
        created_s: When it was composed, in Unix seconds.
    """
    slot = content.local_slot
    # Two schedules of a desk may meet in one slot; each has its digest and its mail.
    mark = hashlib.sha256(f"{content.desk}\n{content.schedule}\n{slot}".encode()).hexdigest()
    return Message(
        key=f"digest-{slug(content.desk)}-{slot.replace(':', '')}-{mark[:8]}",
        desk=content.desk,
        recipients=recipients,
        subject=composed.subject,
        body_text=composed.body_text,
        body_html=composed.body_html,
        created_s=created_s,
        not_after_s=content.scheduled_s + DAY_S,
    )
