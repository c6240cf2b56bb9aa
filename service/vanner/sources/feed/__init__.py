"""Feeds as a source: RSS, Atom and JSON Feed over HTTP."""

from vanner.sources.feed.fetch import FetchLimits
from vanner.sources.feed.source import FeedSource

__all__ = ["FeedSource", "FetchLimits"]
