"""What a desk is sent by cron."""

from vanner.digests.compose import ComposedDigest, compose_digest
from vanner.digests.message import digest_message
from vanner.digests.schedule import Slot, slots

__all__ = ["ComposedDigest", "Slot", "compose_digest", "digest_message", "slots"]
