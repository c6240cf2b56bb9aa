"""Handing over mail: once, later, or not at all."""

import socket

import pytest
from aiosmtpd.controller import Controller
from sqlalchemy import select
from structlog.testing import capture_logs

from vanner.daemon.posting import Postman
from vanner.records import Message
from vanner.settings import MailSettings
from vanner.store.outbox import counts_by_state, mark, queue
from vanner.store.schema import message

NOW_S = 1_700_006_400.0
HOST = "127.0.0.1"
DAY_S = 86400.0


class Inbox(Controller):
    """A real mail server that keeps what it is given and answers as it is told.

    `answers` maps "RCPT", "DATA" or a recipient to the reply that it gets instead of 250;
    the reply "DROP" cuts the connection off.
    """

    def __init__(self):
        self.answers, self.mails = {}, []
        super().__init__(self, hostname=HOST)

    def _create_server(self):
        listener = socket.create_server((HOST, 0))
        self.port = listener.getsockname()[1]
        return self.loop.create_server(self._factory_invoker, sock=listener)

    async def handle_RCPT(self, _server, _session, envelope, address, _options):  # noqa: N802 - aiosmtpd's hook
        answer = self.answers.get(address, self.answers.get("RCPT"))
        if answer is None:
            envelope.rcpt_tos.append(address)
        return answer or "250 OK"

    async def handle_DATA(self, server, _session, envelope):  # noqa: N802 - aiosmtpd's hook
        answer = self.answers.get("DATA", "250 OK")
        if answer.startswith("250") or answer == "DROP":
            self.mails.append((tuple(envelope.rcpt_tos), envelope.content.decode()))
        if answer == "DROP":
            server.transport.abort()
        return answer


class Clock:
    now_s = NOW_S

    def __call__(self):
        return self.now_s


@pytest.fixture
def inbox():
    server = Inbox()
    server.start()
    yield server
    server.stop()


@pytest.fixture
def clock():
    return Clock()


@pytest.fixture
def database(open_database):
    return open_database()


@pytest.fixture
def mail_settings(inbox):
    return MailSettings(
        host=HOST, port=inbox.port, sender="vanner@port.example", encryption="none", timeout="5s"
    )


@pytest.fixture
def postman(database, mail_settings, clock, plan):
    return Postman(database, (plan("quay"),), mail_settings, None, clock)


@pytest.fixture
def put(database):
    """Queues a mail under its key."""

    def into(key, recipients=("watch@port.example",), created_s=NOW_S, not_after_s=None):
        mail = Message(
            key, "quay", recipients, f"Alert {key}", "Ferry", "<p>Ferry</p>", created_s, not_after_s
        )
        with database.write() as connection:
            queue(connection, mail)

    return into


@pytest.fixture
def states(database):
    def now():
        with database.read() as connection:
            return counts_by_state(connection)

    return now


def column(database, name):
    with database.read() as connection:
        return connection.execute(select(message.c[name])).scalar_one()


def subjects(inbox):
    return [text.partition("Subject: ")[2].partition("\r\n")[0] for _, text in inbox.mails]


def test_a_mail_is_sent_once(postman, put, inbox, states):
    put("one")
    with capture_logs() as logs:
        postman.round()
        postman.round()
    assert subjects(inbox) == ["Alert one"]
    assert inbox.mails[0][0] == ("watch@port.example",)
    assert states() == {"sent": 1}
    assert logs == [
        {"event": "mail_sent", "log_level": "info", "key": "one", "desk": "quay", "refused": 0}
    ]


def test_the_time_of_sending_is_kept(postman, put, clock, database):
    put("one")
    clock.now_s += 5
    postman.round()
    assert column(database, "sent_s") == NOW_S + 5


def test_a_mail_goes_out_once_although_a_recipient_is_refused(
    postman, put, inbox, states, database
):
    put("one", ("watch@port.example", "gone@port.example"))
    inbox.answers["gone@port.example"] = "550 no such box"
    postman.round()
    postman.round()
    assert [recipients for recipients, _ in inbox.mails] == [("watch@port.example",)]
    assert states() == {"sent": 1}
    assert column(database, "last_error") == "refused for gone@port.example"


def test_mail_is_handed_over_in_the_order_in_which_it_was_made(postman, put, inbox):
    put("second", created_s=NOW_S - 10)
    put("first", created_s=NOW_S - 20)
    postman.round()
    assert subjects(inbox) == ["Alert first", "Alert second"]


@pytest.mark.parametrize("place", ["RCPT", "DATA"])
def test_a_passing_refusal_is_tried_again_later(postman, put, inbox, states, clock, place):
    put("one")
    inbox.answers[place] = "451 come back later"
    with capture_logs() as logs:
        postman.round()
    assert [(one["event"], one["final"]) for one in logs] == [("mail_failed", False)]
    assert states() == {"queued": 1}
    del inbox.answers[place]
    postman.round()
    assert inbox.mails == []
    clock.now_s += 60
    postman.round()
    assert subjects(inbox) == ["Alert one"]
    assert states() == {"sent": 1}


def test_waits_grow_from_a_minute_to_half_an_hour(postman, put, inbox, clock, database):
    put("one")
    inbox.answers["RCPT"] = "451 come back later"
    waits_s = []
    for _ in range(7):
        postman.round()
        waits_s.append(column(database, "next_try_s") - clock.now_s)
        clock.now_s = column(database, "next_try_s")
    assert waits_s == [60, 120, 240, 480, 960, 1800, 1800]
    assert column(database, "attempts") == 7


def test_mail_waits_while_no_server_is_there(
    database, postman, mail_settings, put, plan, states, clock
):
    put("one")
    with socket.create_server((HOST, 0)) as nobody:
        port = nobody.getsockname()[1]  # free again once the block ends
    astray = mail_settings.model_copy(update={"port": port})
    Postman(database, (plan("quay"),), astray, None, clock).round()
    assert states() == {"queued": 1}
    clock.now_s += 60
    postman.round()
    assert states() == {"sent": 1}


def test_after_three_days_of_trying_it_is_given_up(postman, put, inbox, clock, states):
    put("one")
    inbox.answers["RCPT"] = "451 come back later"
    clock.now_s += 3 * DAY_S
    postman.round()
    assert states() == {"queued": 1}
    clock.now_s += 3600
    with capture_logs() as logs:
        postman.round()
    assert states() == {"refused": 1}
    assert [(one["event"], one["final"]) for one in logs] == [("mail_failed", True)]


@pytest.mark.parametrize("place", ["RCPT", "DATA"])
def test_a_final_refusal_is_not_tried_again(postman, put, inbox, clock, states, database, place):
    put("one")
    inbox.answers[place] = "554 not wanted here"
    postman.round()
    assert states() == {"refused": 1}
    assert "554 not wanted here" in column(database, "last_error")
    inbox.answers.clear()
    clock.now_s += DAY_S
    postman.round()
    assert inbox.mails == []


def test_a_refused_mail_holds_no_other_up(postman, put, inbox, states):
    put("bad", ("gone@port.example",), created_s=NOW_S - 10)
    put("good")
    inbox.answers["gone@port.example"] = "550 no such box"
    postman.round()
    assert subjects(inbox) == ["Alert good"]
    assert states() == {"refused": 1, "sent": 1}


def test_a_mail_that_fails_in_an_unforeseen_way_waits_and_holds_no_other_up(
    database, mail_settings, clock, plan, put, states
):
    # A host label of more than 63 characters is no host name: the resolver's encoding raises.
    odd = mail_settings.model_copy(update={"host": f"{'a' * 70}.example"})
    postman = Postman(database, (plan("quay"),), odd, None, clock)
    put("one")
    put("two")
    with capture_logs() as logs:
        postman.round()
    assert states() == {"queued": 2}
    assert {entry["key"] for entry in logs} == {"one", "two"}
    assert {entry["event"] for entry in logs} == {"mail_failed"}


def test_a_mail_whose_answer_never_came_is_not_sent_again(postman, put, inbox, clock, states):
    put("one")
    inbox.answers["DATA"] = "DROP"
    postman.round()
    assert states() == {"unconfirmed": 1}
    inbox.answers.clear()
    clock.now_s += DAY_S
    postman.round()
    assert len(inbox.mails) == 1


def test_a_mail_cut_off_in_sending_is_unconfirmed_at_start_and_not_sent_again(
    postman, put, inbox, states, database
):
    put("cut")
    put("whole")
    with database.write() as connection:
        mark(connection, "cut", "sending")
    with capture_logs() as logs:
        postman.settle()
    assert logs == [{"event": "mail_unconfirmed", "log_level": "warning", "key": "cut"}]
    postman.round()
    assert subjects(inbox) == ["Alert whole"]
    assert states() == {"sent": 1, "unconfirmed": 1}


def test_a_stale_mail_is_not_sent(postman, put, inbox, clock, states):
    put("late", not_after_s=NOW_S + DAY_S)
    put("alert")
    clock.now_s += DAY_S + 1
    postman.round()
    assert subjects(inbox) == ["Alert alert"]
    assert states() == {"sent": 1, "stale": 1}


def test_a_mail_that_is_not_stale_yet_is_sent(postman, put, clock, states):
    put("in time", not_after_s=NOW_S + DAY_S)
    clock.now_s += DAY_S
    postman.round()
    assert states() == {"sent": 1}


def test_without_a_mail_server_mail_stays_queued(database, put, plan, clock, states):
    put("one")
    Postman(database, (plan("quay"),), None, None, clock).round()
    assert states() == {"queued": 1}
