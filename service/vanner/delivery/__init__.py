"""Hands messages over."""

from vanner.delivery.file import write_digest
from vanner.delivery.smtp import send

__all__ = ["send", "write_digest"]
