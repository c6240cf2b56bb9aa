"""What leaves the house: digests and mails."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from vanner.records.stories import StoryLine


@dataclass(frozen=True, slots=True)
class SourceVolume:
    """How much a source brought in a digest's time, against its usual amount.

    Attributes:
        usual: Items that a time of this length brought in the 14 days before, or None
            where the source is younger than that.
        last_item_s: When its latest item was received, or None.
        quiet: Whether it is silent though it usually is not.
    """

    source: str
    items: int
    usual: float | None
    last_item_s: float | None
    quiet: bool


@dataclass(frozen=True, slots=True)
class DigestContent:
    """All that a digest says; composing it into text needs nothing else.

    Attributes:
        local_slot: The scheduled local date and time as YYYY-MM-DDTHH:MM.
        raised: Alerts raised within the digest's time, oldest first.
        noted: Stories noted within it that stayed below the threshold, strongest first.
        cleared: Alerts that cleared within it.
    """

    desk: str
    schedule: str
    local_slot: str
    timezone: str
    scheduled_s: float
    covers_from_s: float
    covers_until_s: float
    raised: tuple[StoryLine, ...]
    noted: tuple[StoryLine, ...]
    cleared: tuple[StoryLine, ...]
    volumes: tuple[SourceVolume, ...]


@dataclass(frozen=True, slots=True)
class Message:
    """An outgoing mail, composed once and kept until it is handed over.

    Attributes:
        key: Tells whether this message exists already; also its Message-ID's left part.
        not_after_s: Unix seconds after which it is stale and no longer sent, or None.
    """

    key: str
    desk: str
    recipients: tuple[str, ...]
    subject: str
    body_text: str
    body_html: str
    created_s: float
    not_after_s: float | None = None
    headers: Mapping[str, str] = field(default_factory=dict)
