"""Settings: one TOML file, read once, frozen, checked at start with all its faults at once."""

from vanner.settings.load import load_settings
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
from vanner.settings.template import write_template

__all__ = [
    "DeskSettings",
    "FeedSettings",
    "FolderSettings",
    "MailSettings",
    "Secret",
    "ServiceSettings",
    "Settings",
    "SourceSettings",
    "load_settings",
    "write_template",
]
