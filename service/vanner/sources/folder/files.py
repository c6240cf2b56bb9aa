"""The files of a folder: which are there, whether they are whole, and how they are put away."""

from __future__ import annotations

import contextlib
import os
import stat
from pathlib import Path

from vanner.errors import SourceError
from vanner.sources.folder.state import Finished, Stamp, Waiting

DONE = "done"
FAILED = "failed"
_UNFINISHED = (".tmp", ".part", "~")
# A file name may have 255 bytes; a number and ".reason" must fit behind it.
_NAME_BYTES = 235


def make_ready(folder: Path) -> None:
    """Create the folder with `done/` and `failed/` where they are missing.

    Raises:
        SourceError: They cannot be created.
    """
    try:
        for path in (folder / DONE, folder / FAILED):
            path.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise SourceError(
            f"The folder {folder} cannot be made ready ({error.strerror}); "
            "let Vanner create and write it."
        ) from error


def stamp_of(path: Path) -> Stamp | None:
    """The state of a regular file; None where there is none (links are not followed)."""
    try:
        found = path.lstat()
    except OSError:
        return None
    if not stat.S_ISREG(found.st_mode):
        return None
    return Stamp(size=found.st_size, mtime_ns=found.st_mtime_ns)


def list_files(folder: Path) -> dict[str, Stamp]:
    """The files that may be taken, oldest first, by name.

    Left out are links, subfolders, names that begin with a dot, and names that programs give
    to files they still write. A name that no message could show is replaced on the disk.

    Raises:
        SourceError: The folder cannot be listed.
    """
    try:
        names = os.listdir(folder)  # noqa: PTH208 - the names alone are wanted
    except OSError as error:
        raise SourceError(
            f"The folder {folder} cannot be listed ({error.strerror}); let Vanner read it."
        ) from error
    found = []
    for name in names:
        if name.startswith(".") or name.lower().endswith(_UNFINISHED):
            continue
        stamp = stamp_of(folder / name)
        shown = name if stamp is None else _printable(folder, name)
        if stamp is not None and shown is not None:
            found.append((stamp.mtime_ns, shown, stamp))
    return {name: stamp for _, name, stamp in sorted(found, key=lambda file: file[:2])}


def _printable(folder: Path, name: str) -> str | None:
    """The name, or the one that the file was given instead; None where that failed."""
    if name.isprintable():
        return name
    clean = "".join(letter if letter.isprintable() else "_" for letter in name)
    target = free_path(folder, clean)
    try:
        (folder / name).rename(target)
    except OSError:
        return None
    return target.name


def is_settled(stamp: Stamp, noted: Waiting | None, now_s: float, settle_s: float) -> bool:
    """Whether a file is no longer written to.

    Its last change must lie `settle_s` back. Where that is in the future by our clock, it
    must have stayed as it was noted for as long.
    """
    if stamp.mtime_ns / 1e9 <= now_s - settle_s:
        return True
    if noted is None or noted.stamp != stamp:
        return False
    return stamp.mtime_ns / 1e9 > now_s and noted.noted_s <= now_s - settle_s


def put_away(folder: Path, file: Finished) -> str | None:
    """Move a file to `done/` or `failed/`; a clause that says why where it cannot be moved.

    A file that is gone was moved before; one that has changed stays, to be taken anew.
    """
    path = folder / file.name
    if stamp_of(path) != file.stamp:
        return None
    target = free_path(folder / (DONE if file.reason is None else FAILED), file.name)
    note = target.with_name(target.name + ".reason")
    try:
        if file.reason is not None:
            # The note comes first: no file is in failed/ without one, wherever we are killed.
            note.write_text(file.reason + "\n", encoding="utf-8")
        path.replace(target)
    except OSError as error:
        return str(error.strerror)
    if stamp_of(target) != file.stamp:
        return_unread(folder, target)
    return None


def return_unread(folder: Path, moved: Path) -> None:
    """Bring a file back that took the place of another just as that was moved: it has not
    been read. Its name there may be taken once more, so it may get a number.
    """
    with contextlib.suppress(OSError):
        moved.with_name(moved.name + ".reason").unlink(missing_ok=True)
        moved.replace(free_path(folder, moved.name))


def free_path(folder: Path, name: str) -> Path:
    """The name in that folder, with a number before its extension where it is taken."""
    stem, extension = split_name(name)
    while len(os.fsencode(stem + extension)) > _NAME_BYTES and len(stem) > 1:
        stem = stem[:-1]
    path, number = folder / (stem + extension), 1
    while os.path.lexists(path):
        path, number = folder / f"{stem}-{number}{extension}", number + 1
    return path


def split_name(name: str) -> tuple[str, str]:
    """Stem and extension; `.jsonl.gz` is one extension, more than 20 characters are none."""
    cut = len(name) - len(".jsonl.gz") if name.lower().endswith(".jsonl.gz") else name.rfind(".")
    if cut <= 0 or len(name) - cut > 20:
        return name, ""
    return name[:cut], name[cut:]
