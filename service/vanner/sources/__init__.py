"""Where text comes from: one small interface, `records.Source`, and its implementations."""

from __future__ import annotations

from vanner.records import Source
from vanner.settings import FeedSettings, SourceSettings
from vanner.sources.feed import FeedSource
from vanner.sources.folder import FolderSource


def build_source(settings: SourceSettings) -> Source:
    """The source that its settings describe."""
    if isinstance(settings, FeedSettings):
        return FeedSource(settings)
    return FolderSource(settings)
