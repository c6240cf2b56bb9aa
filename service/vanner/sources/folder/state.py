"""What a folder's cursor remembers between polls."""

from __future__ import annotations

import structlog
from pydantic import BaseModel, ConfigDict, ValidationError

from vanner.records import Cursor, Json

_LOG = structlog.get_logger()


class Stamp(BaseModel):
    """What tells one state of a file from another without reading it."""

    model_config = ConfigDict(frozen=True)

    size: int
    mtime_ns: int


class Finished(BaseModel):
    """A file whose items were handed on; it is put away once that is known to be committed.

    Attributes:
        reason: Why it goes to `failed/`, or None where it goes to `done/`.
        stuck: Whether putting it away failed, which is reported once and tried again.
    """

    model_config = ConfigDict(frozen=True)

    name: str
    stamp: Stamp
    reason: str | None = None
    stuck: bool = False


class Progress(BaseModel):
    """How far a file of many lines has been handed on.

    Attributes:
        line: The last line that was read.
        accepted: How many items it has given.
        left_out: How many lines gave none; `reasons` holds a sentence for the first of them.
    """

    model_config = ConfigDict(frozen=True)

    name: str
    stamp: Stamp
    line: int = 0
    accepted: int = 0
    left_out: int = 0
    reasons: tuple[str, ...] = ()


class Waiting(BaseModel):
    """A file dated in the future: it settles once it stays as it was noted."""

    model_config = ConfigDict(frozen=True)

    stamp: Stamp
    noted_s: float


class FolderState(BaseModel):
    """The whole cursor; empty for a folder that was never polled."""

    model_config = ConfigDict(frozen=True)

    accepted: tuple[Finished, ...] = ()
    progress: Progress | None = None
    waiting: dict[str, Waiting] = {}

    @classmethod
    def of(cls, cursor: Cursor, source: str) -> FolderState:
        """The state that a cursor holds. One that cannot be read counts as empty: the files
        are then read again, and the items' keys keep them from counting twice.
        """
        try:
            return cls.model_validate(dict(cursor))
        except ValidationError as error:
            _LOG.warning("folder_cursor_unreadable", source=source, faults=error.error_count())
            return cls()

    def cursor(self) -> dict[str, Json]:
        """The state as a cursor to store."""
        return self.model_dump(mode="json")
