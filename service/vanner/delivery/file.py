"""Digests as files: one plain text and one HTML file for each desk and slot."""

from __future__ import annotations

import os
from datetime import datetime
from pathlib import Path

from vanner.alerts.lines import one_line
from vanner.alerts.wording import slug
from vanner.errors import DeliveryError


def write_digest(
    folder: Path, desk: str, local_slot: str, subject: str, body_text: str, body_html: str
) -> Path:
    """Write `DESK-YYYY-MM-DD-HHMM.txt` and the same as `.html`; the path of the text file.

    Each file appears whole or not at all, and writing it again gives the same file.

    Args:
        folder: Where to write; it is made where it is missing.
        desk: The desk's name; the file names hold its slug.
        local_slot: The slot as YYYY-MM-DDTHH:MM.
        subject: Becomes the text file's first line.
        body_text: The digest as plain text.
        body_html: The digest as HTML.

    Raises:
        DeliveryError: The folder or a file cannot be written; trying again may help.
        ValueError: The slot is no local date and time.
    """
    slot = datetime.fromisoformat(local_slot).strftime("%Y-%m-%d-%H%M")
    text_file = folder / f"{slug(desk)}-{slot}.txt"
    try:
        folder.mkdir(parents=True, exist_ok=True)
        _write(text_file.with_suffix(".html"), body_html)
        _write(text_file, f"{one_line(subject)}\n\n{body_text}")
    except OSError as error:
        raise DeliveryError(
            f"The digest {text_file} cannot be written ({error.strerror or error}); "
            "give the folder room and let Vanner write there."
        ) from error
    return text_file


def _write(path: Path, text: str) -> None:
    # A fixed name beside the file: what a crash leaves behind is overwritten by the next try.
    part = path.with_name(f".{path.name}.part")
    try:
        with part.open("wb") as file:
            file.write(text.encode("utf-8", "replace"))
            file.flush()
            # Else a power cut soon after could leave the new name with nothing in it.
            os.fsync(file.fileno())
        part.replace(path)
    except OSError:
        part.unlink(missing_ok=True)
        raise
