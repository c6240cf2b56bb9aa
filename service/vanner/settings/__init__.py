"""Settings: one TOML file, read once, frozen, checked at start with all its faults at once."""

from vanner.settings.models import (
    DeskSettings,
    FeedSettings,
    FolderSettings,
    MailSettings,
    Secret,
    ServiceSettings,
    Settings,
    SourceSettings,
)

__all__ = [
    "DeskSettings",
    "FeedSettings",
    "FolderSettings",
    "MailSettings",
    "Secret",
    "ServiceSettings",
    "Settings",
    "SourceSettings",
]
