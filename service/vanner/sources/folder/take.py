"""Reads a folder's files: documents of one item, and archives of many in batches."""

from __future__ import annotations

import errno
from collections.abc import Generator
from dataclasses import replace
from pathlib import Path

from vanner.errors import SourceError
from vanner.records import RawItem
from vanner.sources.archive import ArchiveFault, Line, archive_lines
from vanner.sources.batch import Batch
from vanner.sources.folder.documents import DOCUMENT_BYTES, document_item
from vanner.sources.folder.files import split_name, stamp_of
from vanner.sources.folder.state import Finished, Progress

ARCHIVES = (".jsonl", ".jsonl.gz")
DOCUMENTS = (".txt", ".html", ".htm", ".eml")
_MOST_REASONS = 100
# The machine lacks something for now: the file is not at fault.
_PASSING = {errno.EMFILE, errno.ENFILE, errno.ENOMEM}


def rejected(file: Progress, reason: str, batch: Batch) -> Finished:
    """A file that gave nothing, with the fault that says so."""
    sentence = f"{file.name} is left out: {reason}."
    batch.faults.append(sentence)
    return Finished(name=file.name, stamp=file.stamp, reason=sentence)


class Taker:
    """Takes files of one folder. An archive stays open between polls that continue it."""

    def __init__(self, folder: Path, language: str | None) -> None:
        self._folder = folder
        self._language = language
        self._lines: Generator[Line, None, None] | None = None
        self._reading: Progress | None = None

    def take(self, file: Progress, batch: Batch) -> Finished | Progress | None:
        """Add a file's items and faults to the batch, as many as fit.

        Returns:
            The file as finished, or how far it was read, or None where it is gone or was
            written to meanwhile: nothing of it is then in the batch.

        Raises:
            SourceError: The machine cannot read it just now.
        """
        extension = split_name(file.name)[1].lower()
        part = batch.rest()
        outcome: Finished | Progress | None
        try:
            if extension in ARCHIVES:
                outcome = self._take_lines(file, part)
            elif extension in DOCUMENTS:
                outcome = self._take_document(file, part, extension)
            else:
                kinds = ", ".join(DOCUMENTS + ARCHIVES)
                outcome = rejected(file, f"its name ends in none of {kinds}", part)
        except OSError as error:
            outcome = self._unreadable(file, error, part)
        if outcome is None or stamp_of(self._folder / file.name) != file.stamp:
            self.close()
            return None
        batch.join(part)
        return outcome

    def _unreadable(self, file: Progress, error: OSError, part: Batch) -> Finished | None:
        self.close()
        if error.errno in _PASSING:
            raise SourceError(
                f"{self._folder / file.name} cannot be read now ({error.strerror}); "
                "it is tried again."
            ) from error
        if isinstance(error, FileNotFoundError):
            return None
        return rejected(file, f"it cannot be read ({error.strerror})", part)

    def _take_document(self, file: Progress, part: Batch, extension: str) -> Finished:
        with (self._folder / file.name).open("rb") as opened:
            data = opened.read(DOCUMENT_BYTES + 1)
        found = document_item(data, extension)
        if isinstance(found, str):
            return rejected(file, found, part)
        part.add(self._owned(found), len(data))
        return Finished(name=file.name, stamp=file.stamp)

    def _take_lines(self, file: Progress, part: Batch) -> Finished | Progress:
        lines, now = self._lines_after(file), file
        for line in lines:
            now = self._after(now, line, part)
            if part.full:
                self._reading = now
                return now
        self.close()
        return _finished(now, part)

    def _after(self, file: Progress, line: Line, part: Batch) -> Progress:
        """The file's progress after one more line, whose item or fault joins the batch."""
        if isinstance(line.result, ArchiveFault):
            sentence = line.result.sentence
            part.faults.append(sentence)
            reasons = (*file.reasons, sentence)[:_MOST_REASONS]
            return file.model_copy(
                update={"line": line.number, "left_out": file.left_out + 1, "reasons": reasons}
            )
        part.add(self._owned(line.result), line.size_bytes)
        return file.model_copy(update={"line": line.number, "accepted": file.accepted + 1})

    def _owned(self, item: RawItem) -> RawItem:
        """The item as this source's own, whatever source an archive's line names."""
        return replace(item, source=None, language=item.language or self._language)

    def _lines_after(self, file: Progress) -> Generator[Line, None, None]:
        if self._lines is None or self._reading != file:
            self.close()
            self._lines = self._read(file)
        self._reading = None
        return self._lines

    def _read(self, file: Progress) -> Generator[Line, None, None]:
        path = self._folder / file.name
        with path.open("rb") as opened:
            yield from archive_lines(opened, path, after_line=file.line)

    def close(self) -> None:
        """Close the archive that is open, if any."""
        if self._lines is not None:
            self._lines.close()
        self._lines = None


def _finished(file: Progress, part: Batch) -> Finished:
    if not file.accepted and not file.left_out:
        return rejected(file, "it is empty", part)
    if not file.left_out:
        return Finished(name=file.name, stamp=file.stamp)
    summary = f"{file.name}: {file.accepted} items were accepted, {file.left_out} faults found."
    return Finished(name=file.name, stamp=file.stamp, reason="\n".join((summary, *file.reasons)))
