"""Handing over what the engine composed: mail to the server, digests to folders."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import structlog

from vanner.daemon.plan import DeskPlan
from vanner.delivery import send, write_digest
from vanner.errors import DatabaseError, DeliveryError
from vanner.records import Message
from vanner.settings import MailSettings
from vanner.store import outbox
from vanner.store.database import Database
from vanner.store.digest_content import mark_filed, unfiled

log = structlog.get_logger()

# Minutes between tries grow from one to half an hour: common practice among mail servers,
# from memory; RFC 5321 section 4.5.4.1 asks for at least 30 minutes once a receiver is slow.
_FIRST_RETRY_S = 60.0
_LONGEST_RETRY_S = 1800.0
_LONGEST_TRYING_S = 3 * 86400.0


class Postman:
    """Sends queued mail and files digests. One thread at a time."""

    def __init__(
        self,
        database: Database,
        plans: Sequence[DeskPlan],
        mail: MailSettings | None,
        password: str | None,
        clock: Callable[[], float],
    ) -> None:
        self._database = database
        self._folders = {plan.desk: plan.digest_folder for plan in plans}
        self._mail = mail
        self._password = password
        self._clock = clock

    def settle(self) -> None:
        """At start: what was in mid-sending when the last run died stays unsent for good."""
        with self._database.write() as connection:
            keys = outbox.settle_interrupted(connection)
        for key in keys:
            log.warning("mail_unconfirmed", key=key)

    def round(self) -> None:
        """File digests and send what is due. Failures are noted and tried again later.

        Raises:
            DatabaseError: The database refused.
        """
        self._file_digests()
        if self._mail is None:
            return
        with self._database.read() as connection:
            messages = outbox.due(connection, self._clock())
        for message in messages:
            self._hand_over(message, self._mail)

    def _file_digests(self) -> None:
        with self._database.read() as connection:
            waiting = unfiled(connection)
        for digest_id, row in waiting:
            folder = self._folders.get(row.desk)
            if folder is not None:
                try:
                    write_digest(
                        folder, row.desk, row.local_slot, row.subject, row.body_text, row.body_html
                    )
                except DeliveryError as error:
                    log.warning("digest_not_filed", desk=row.desk, reason=str(error))
                    continue
                log.info("digest_filed", desk=row.desk, slot=row.local_slot)
            with self._database.write() as connection:
                mark_filed(connection, digest_id)

    def _hand_over(self, message: Message, mail: MailSettings) -> None:
        now_s = self._clock()
        if message.not_after_s is not None and now_s > message.not_after_s:
            self._mark(message, "stale")
            return
        offered = False

        def before_data() -> None:
            nonlocal offered
            self._mark(message, "sending")
            offered = True

        try:
            refused = send(message, mail, self._password, before_data=before_data)
        except DeliveryError as error:
            self._failed(message, error, now_s)
            return
        except DatabaseError:
            raise
        except Exception:
            # One mail that cannot be put together or handed over must not keep the rest back.
            log.exception("mail_failed", key=message.key)
            sentence = "The mail could not be sent for a reason that the log shows."
            self._failed(
                message, DeliveryError(sentence, final=offered, unconfirmed=offered), now_s
            )
            return
        self._mark(message, "sent", last_error=_refusal(refused))
        log.info("mail_sent", key=message.key, desk=message.desk, refused=len(refused))

    def _mark(self, message: Message, state: str, last_error: str | None = None) -> None:
        with self._database.write() as connection:
            outbox.mark(connection, message.key, state, now_s=self._clock(), last_error=last_error)

    def _failed(self, message: Message, error: DeliveryError, now_s: float) -> None:
        given_up = error.final or now_s - message.created_s > _LONGEST_TRYING_S
        log.warning("mail_failed", key=message.key, final=given_up, reason=str(error))
        if given_up:
            # An unconfirmed mail may have arrived: sending it again could make two of it.
            state = "unconfirmed" if error.unconfirmed else "refused"
            self._mark(message, state, last_error=str(error))
            return
        with self._database.write() as connection:
            tries = outbox.attempts_of(connection, message.key)
            wait_s = min(_FIRST_RETRY_S * 2.0**tries, _LONGEST_RETRY_S)
            outbox.try_later(connection, message.key, now_s + wait_s, str(error))


def _refusal(refused: Sequence[str]) -> str | None:
    return f"refused for {', '.join(refused)}" if refused else None
