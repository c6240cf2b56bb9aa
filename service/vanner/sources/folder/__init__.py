"""Files dropped into a directory."""

from vanner.sources.folder.source import FolderSource

__all__ = ["FolderSource"]
