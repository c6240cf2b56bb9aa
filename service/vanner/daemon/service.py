"""The running service: sources polled, pulses closed, mail sent, each on its own job.

Jobs are APScheduler's; each turn of a job sets the time of its next one, so that a changed
clock or a slow turn moves the schedule and never piles turns up. A job that fails is logged
and comes again: a source never stops another.
"""

from __future__ import annotations

import random
import threading
from collections.abc import Callable, Sequence
from contextlib import suppress
from datetime import UTC, datetime
from functools import partial

import structlog
from apscheduler.executors.pool import ThreadPoolExecutor
from apscheduler.jobstores.base import ConflictingIdError, JobLookupError
from apscheduler.schedulers import SchedulerNotRunningError
from apscheduler.schedulers.background import BackgroundScheduler

from vanner.clock import iso_utc
from vanner.daemon.engine import Engine, Progress
from vanner.daemon.polling import Poller
from vanner.daemon.posting import Postman
from vanner.errors import VannerError
from vanner.records import Source
from vanner.store.database import Database
from vanner.store.source_states import register, resume

log = structlog.get_logger()

_AFTER_CLOSE_S = 0.02  # so that the job never runs a hair before the pulse has ended
_RETRY_S = 5.0  # after a database that refused
_STOP_WAIT_S = 7.0
_POST_WAIT_S = 1.0
# A turn sets its next one before it has quite ended. Were only one instance allowed, a next one
# that is due at once (a pulse that took longer than a pulse) could be dropped, and the job with
# it for good. Two turns of a job never work side by side all the same: see the locks.
_INSTANCES = 100
_POLLS, _OWN = "polls", "own"  # the pools of threads


class _Scheduler(BackgroundScheduler):  # type: ignore[misc]  # the library has no types
    """A scheduler that can be stopped amid its work.

    The library's loop looks for its job in the wrong place once a stop has begun, and would
    end with a traceback.
    """

    def _main_loop(self) -> None:
        with suppress(JobLookupError):
            super()._main_loop()


class Service:
    """Polls sources and runs an engine until told to stop."""

    def __init__(
        self,
        database: Database,
        engine: Engine,
        postman: Postman,
        sources: Sequence[tuple[Source, str, float]],
        rng: random.Random,
        clock: Callable[[], float],
        on_pulse: Callable[[Progress], None] | None = None,
    ) -> None:
        self._database = database
        self._engine = engine
        self._postman = postman
        self._clock = clock
        self._on_pulse = on_pulse
        self._kinds = [(source.name, kind) for source, kind, _ in sources]
        self._pollers = [
            Poller(database, source, kind, every_s, random.Random(rng.random()), clock)  # noqa: S311 - jitter, not secrecy
            for source, kind, every_s in sources
        ]
        self._stopping = threading.Event()
        self._working = threading.Lock()
        self._posting = threading.Lock()
        self._scheduler = _Scheduler(
            executors={
                _POLLS: ThreadPoolExecutor(max_workers=min(32, len(self._pollers) + 1)),
                # Threads of their own: polls that hang, however many, hold no pulse up.
                _OWN: ThreadPoolExecutor(max_workers=2),
            },
            job_defaults={
                "misfire_grace_time": None,
                "coalesce": True,
                "max_instances": _INSTANCES,
            },
            timezone=UTC,
        )

    def start(self) -> None:
        """Load the desks and start the jobs.

        Raises:
            DatabaseError: The database refused.
        """
        self._postman.settle()
        with self._database.write() as connection:
            register(connection, self._kinds)
            not_before_s = resume(connection, [name for name, _ in self._kinds])
        now_s = self._clock()
        self._engine.begin(now_s)
        self._scheduler.start()
        self._at(now_s, "pulse", self._pulse)  # at once: something may have waited
        self._at(now_s, "post", self._post)
        for poller in self._pollers:
            name = poller.source.name
            first_s = max(now_s, not_before_s.get(name, now_s))
            self._at(first_s, f"poll {name}", partial(self._poll, poller), _POLLS)
        log.info("service_started", sources=len(self._pollers), desks=len(self._engine.plans))

    def _at(self, time_s: float, name: str, work: Callable[[], None], threads: str = _OWN) -> None:
        if self._stopping.is_set():
            return
        # The scheduler has ended between the check and the call: then nothing is to be done.
        with suppress(SchedulerNotRunningError, ConflictingIdError):
            self._scheduler.add_job(
                work,
                "date",
                run_date=datetime.fromtimestamp(time_s, UTC),
                id=name,
                executor=threads,
                replace_existing=True,
            )

    def _pulse(self) -> None:
        now_s = self._clock()
        next_s = self._engine.next_end_s(now_s) + _AFTER_CLOSE_S
        if self._engine.read_s > next_s:
            # No pulse closes until the clock has caught up; nothing is lost meanwhile.
            log.warning("clock_set_back", read_until=iso_utc(self._engine.read_s))
        try:
            with self._working:
                if not self._stopping.is_set():
                    self._engine.advance(now_s, self._on_pulse, self._stopping.is_set)
        except VannerError as error:
            log.error("pulse_failed", reason=str(error))  # noqa: TRY400 - users get a sentence
            next_s = self._clock() + _RETRY_S
        except Exception:
            log.exception("pulse_failed")
            next_s = self._clock() + _RETRY_S
        finally:
            self._at(next_s, "pulse", self._pulse)
            self._at(self._clock(), "post", self._post)

    def _post(self) -> None:
        if not self._posting.acquire(blocking=False):
            return  # a round is under way; the next pulse brings another
        try:
            self._postman.round()
        except VannerError as error:
            log.error("post_failed", reason=str(error))  # noqa: TRY400 - users get a sentence
        except Exception:
            log.exception("post_failed")
        finally:
            self._posting.release()

    def _poll(self, poller: Poller) -> None:
        name = poller.source.name
        try:
            next_s = poller.turn().next_s
        except VannerError as error:
            log.error("poll_failed", source=name, reason=str(error))  # noqa: TRY400 - users get a sentence
            next_s = self._clock() + max(poller.every_s, _RETRY_S)
        except Exception:
            log.exception("poll_failed", source=name)
            next_s = self._clock() + max(poller.every_s, _RETRY_S)
        if next_s is None:
            log.warning("source_stopped", source=name)
        else:
            self._at(next_s, f"poll {name}", partial(self._poll, poller), _POLLS)

    def stop(self) -> None:
        """Finish the pulse that is being committed, save the models' state, end the jobs."""
        self._stopping.set()
        if self._scheduler.running:
            self._scheduler.shutdown(wait=False)
        if self._working.acquire(timeout=_STOP_WAIT_S):
            try:
                self._engine.save()
            except VannerError as error:
                log.error("save_failed", reason=str(error))  # noqa: TRY400 - users get a sentence
            finally:
                self._working.release()
        # A mail that is being handed over may become known as sent, if that takes no time.
        if self._posting.acquire(timeout=_POST_WAIT_S):
            self._posting.release()
        log.info("service_stopped")
