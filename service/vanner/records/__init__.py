"""The frozen values that one stage hands to the next. Times are Unix seconds (UTC)."""

from vanner.records.items import (
    Cursor,
    Item,
    Json,
    Poll,
    RawItem,
    Source,
    StoredItem,
)
from vanner.records.messages import (
    DigestContent,
    Message,
    SourceVolume,
)
from vanner.records.readings import (
    Reading,
    Topic,
)
from vanner.records.stories import (
    ItemLine,
    StoryItem,
    StoryLine,
    StoryRecord,
    StoryTerm,
)

__all__ = [
    "Cursor",
    "DigestContent",
    "Item",
    "ItemLine",
    "Json",
    "Message",
    "Poll",
    "RawItem",
    "Reading",
    "Source",
    "SourceVolume",
    "StoredItem",
    "StoryItem",
    "StoryLine",
    "StoryRecord",
    "StoryTerm",
    "Topic",
]
