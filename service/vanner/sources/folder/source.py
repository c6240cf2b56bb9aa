"""The folder as a source: takes files that are whole, and puts them away once committed."""

from __future__ import annotations

import structlog

from vanner.records import Cursor, Poll
from vanner.settings import FolderSettings
from vanner.sources.batch import Batch
from vanner.sources.folder.files import is_settled, list_files, make_ready, put_away
from vanner.sources.folder.state import Finished, FolderState, Progress, Stamp, Waiting
from vanner.sources.folder.take import Taker

_LOG = structlog.get_logger()


class FolderSource:
    """Takes `.txt .html .htm .eml .jsonl .jsonl.gz` files dropped into a directory.

    A poll hands on items with a cursor that names their files. The next poll gets that
    cursor only if both were committed, and only then are the files moved to `done/`, or to
    `failed/` with a `.reason` beside them. Killed at any moment, nothing is lost; what is
    read twice has the same identifier.
    """

    def __init__(
        self, settings: FolderSettings, *, settle_s: float = 2.0, batch_items: int = 1000
    ) -> None:
        self._settings = settings
        self._settle_s = settle_s
        self._batch_items = batch_items
        self._taker = Taker(settings.path, settings.language)

    @property
    def name(self) -> str:
        """The source's name in the settings."""
        return self._settings.name

    def poll(self, cursor: Cursor, now_s: float) -> Poll:
        """Put away what was committed, then take the files that are whole, oldest first.

        Raises:
            SourceError: The folder or a file in it cannot be used just now.
        """
        make_ready(self._settings.path)
        state, batch = FolderState.of(cursor, self.name), Batch(self._batch_items)
        accepted = self._put_away(state.accepted, batch)
        files = list_files(self._settings.path)
        for stuck in accepted:
            if files.get(stuck.name) == stuck.stamp:
                del files[stuck.name]
        ready, waiting = self._ready(files, state, now_s)
        stuck_count, progress = len(accepted), None
        while ready and not batch.full and progress is None:
            outcome = self._taker.take(ready.pop(0), batch)
            if isinstance(outcome, Progress):
                progress = outcome
            elif outcome is not None:
                accepted.append(outcome)
        return Poll(
            items=tuple(batch.items),
            cursor=FolderState(
                accepted=tuple(accepted), progress=progress, waiting=waiting
            ).cursor(),
            more=bool(ready) or progress is not None or len(accepted) > stuck_count,
            faults=tuple(batch.faults),
        )

    def _put_away(self, files: tuple[Finished, ...], batch: Batch) -> list[Finished]:
        """Move committed files; those that cannot be moved are kept in mind, told once."""
        stuck = []
        for file in files:
            reason = put_away(self._settings.path, file)
            if reason is None:
                _LOG.info(
                    "folder_file_put_away",
                    source=self.name, file=file.name, accepted=file.reason is None,
                )  # fmt: skip
                continue
            stuck.append(file.model_copy(update={"stuck": True}))
            if not file.stuck:
                batch.faults.append(
                    f"{file.name} was read but cannot be moved out of "
                    f"{self._settings.path} ({reason}); let Vanner write there."
                )
        return stuck

    def _ready(
        self, files: dict[str, Stamp], state: FolderState, now_s: float
    ) -> tuple[list[Progress], dict[str, Waiting]]:
        """The files to take, one that was begun before all others, and those that wait."""
        ready: list[Progress] = []
        waiting = {}
        for name, stamp in files.items():
            noted = state.waiting.get(name)
            if not is_settled(stamp, noted, now_s, self._settle_s):
                if noted is None or noted.stamp != stamp:
                    noted = Waiting(stamp=stamp, noted_s=now_s)
                if stamp.mtime_ns / 1e9 > now_s:
                    waiting[name] = noted
            elif state.progress and (name, stamp) == (state.progress.name, state.progress.stamp):
                ready.insert(0, state.progress)
            else:
                ready.append(Progress(name=name, stamp=stamp))
        return ready, waiting

    def close(self) -> None:
        """Close the file that is open between polls, if any."""
        self._taker.close()
