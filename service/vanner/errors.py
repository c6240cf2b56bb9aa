"""Errors for users, sorted by what the caller can do about them.

Each carries one sentence that says what is wrong, where, and what to do. The command line
prints that sentence on stderr and leaves with the class's exit status; nothing else is shown.
"""

from __future__ import annotations

from typing import ClassVar


class VannerError(Exception):
    """Something that the user can mend. The message is one sentence for the terminal."""

    exit_status: ClassVar[int] = 1


class SettingsError(VannerError):
    """The settings are wrong: correct the file and start again.

    Attributes:
        faults: One line for each fault found, all of them at once.
    """

    exit_status: ClassVar[int] = 2

    def __init__(self, message: str, faults: tuple[str, ...] = ()) -> None:
        super().__init__(message)
        self.faults = faults


class DatabaseError(VannerError):
    """The database cannot be used as it is: wrong file, wrong version, no room, no right."""

    exit_status: ClassVar[int] = 3


class DatabaseBusyError(DatabaseError):
    """Another program holds the database: the same work may succeed later."""


class DaemonRunningError(VannerError):
    """A daemon already serves this database: use that one or end it first."""

    exit_status: ClassVar[int] = 4


class InputError(VannerError):
    """A file or an archive that was named cannot be read at all."""

    exit_status: ClassVar[int] = 5


class SourceError(VannerError):
    """A source failed this time. The daemon notes it, waits and tries again.

    Attributes:
        retry_at_s: Unix seconds before which trying again is unwelcome, or None.
    """

    def __init__(self, message: str, retry_at_s: float | None = None) -> None:
        super().__init__(message)
        self.retry_at_s = retry_at_s


class RejectedItemError(VannerError):
    """One entry, line or file that cannot become an item; its neighbours are unaffected."""


class DeliveryError(VannerError):
    """A mail or file could not be handed over. The message stays queued unless `final`.

    Attributes:
        final: Whether the receiver refused for good, so that trying again is useless.
        unconfirmed: Whether the receiver may have it all the same; then it is final too, for
            trying again could hand it over twice.
    """

    def __init__(self, message: str, *, final: bool = False, unconfirmed: bool = False) -> None:
        super().__init__(message)
        self.final = final
        self.unconfirmed = unconfirmed
