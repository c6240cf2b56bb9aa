"""vanner digest: what a desk's digest would say, and the latest one."""

import pytest

from vanner.records import Item
from vanner.store.accept import accept
from vanner.store.checkpoints import begin_desk
from vanner.store.database import Database
from vanner.store.digest_content import DigestRow, keep_digest
from vanner.store.outbox import counts_by_state
from vanner.store.pulses import ClockState, start_clock

AT_S = 1_700_308_800.0  # 2023-11-18 12:00 UTC


@pytest.fixture
def database(settings, tmp_path):
    """The database of settings with the desks metro and port, which began at AT_S."""
    settings()
    opened = Database.open(tmp_path / "vanner.db")
    item = Item("inbox", "a", "Tide tables", "", None, None, None, AT_S, True, "0" * 64)
    with opened.write() as connection:
        start_clock(connection, ClockState(60.0, AT_S + 60, AT_S + 60, "service"))
        for desk in ("metro", "port"):
            begin_desk(connection, desk, AT_S)
        accept(connection, [item], AT_S, teaches=False)
    yield opened
    opened.close()


def made(database, desk, subject, body_text, scheduled_s):
    row = DigestRow(
        desk, "0 7 * * *", f"slot {scheduled_s}", scheduled_s, AT_S, scheduled_s,
        subject, body_text, "<p></p>",
    )  # fmt: skip
    with database.write() as connection:
        keep_digest(connection, row, filed=True)


@pytest.mark.usefixtures("database")
def test_a_preview_has_a_subject_and_a_text(vanner):
    ended = vanner("digest", "metro")
    assert (ended.status, ended.err) == (0, "")
    subject, empty, *text = ended.out.splitlines()
    assert "metro" in subject
    assert empty == ""
    assert any("inbox" in line for line in text)


def test_a_preview_stores_and_queues_nothing(vanner, database):
    vanner("digest", "metro")
    with database.read() as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM digest").scalar_one() == 0
        assert counts_by_state(connection) == {}


def test_the_latest_digest_of_the_desk_is_printed(vanner, database):
    made(database, "metro", "Morning", "All quiet.", AT_S + 100)
    made(database, "metro", "Evening", "Ferry aground.", AT_S + 200)
    made(database, "port", "Elsewhere", "Nothing.", AT_S + 300)
    ended = vanner("digest", "metro", "--last")
    assert (ended.status, ended.out) == (0, "Evening\n\nFerry aground.\n")


@pytest.mark.usefixtures("database")
def test_a_desk_without_a_digest_says_so(vanner):
    ended = vanner("digest", "port", "--last")
    assert (ended.status, ended.out) == (0, "Desk port has had no digest yet.\n")


def test_the_only_desk_need_not_be_named(vanner, database, tmp_path):
    path = tmp_path / "vanner.toml"
    path.write_text(path.read_text().rpartition("[[desk]]")[0])
    made(database, "metro", "Morning", "All quiet.", AT_S + 100)
    assert vanner("digest", "--last").out == "Morning\n\nAll quiet.\n"


def test_a_missing_database_is_told(vanner, settings, tmp_path):
    settings()
    ended = vanner("digest", "metro")
    assert (ended.status, ended.out) == (3, "")
    assert ended.err == f"vanner: There is no database {tmp_path / 'vanner.db'}; check the name.\n"
