"""Files that are no usable database: one clear sentence each, and not a byte of them changed."""

import os
import shutil
import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from vanner.errors import DatabaseError
from vanner.store.database import Database
from vanner.store.identity import APPLICATION_ID

CUT_SHORT = "is cut short; restore a backup made by `vanner db backup`."
DAMAGED = "cannot be used: it is damaged; restore a backup made by `vanner db backup`."
FOREIGN = "belongs to another program; name another file."
NO_DATABASE = "is no SQLite database; name another file."
PAGE = 4096


@pytest.fixture
def path(tmp_path, blank):
    """A sound database of several pages."""
    path = tmp_path / "vanner.db"
    shutil.copyfile(blank, path)
    assert path.stat().st_size > 8 * PAGE
    return path


def refusal(path):
    """The sentence with which a file is refused, however it is opened; it stays as it is."""
    before = path.read_bytes() if path.is_file() else None
    sentences = set()
    for create in (True, False):
        for migrate in (True, False):
            with pytest.raises(DatabaseError) as caught:
                Database.open(path, create=create, migrate=migrate)
            sentences.add(str(caught.value))
    (sentence,) = sentences
    assert str(path) in sentence
    assert sentence.endswith(".")
    assert "\n" not in sentence
    if before is not None:
        assert path.read_bytes() == before
    return sentence


@pytest.mark.parametrize(
    "size", [16, 50, 99, 100, 512, PAGE - 1, PAGE, PAGE + 1, 2 * PAGE, 5 * PAGE + 1000, -PAGE, -1]
)
def test_a_file_cut_at_any_length_is_told_as_cut_short(path, size):
    os.truncate(path, size if size > 0 else path.stat().st_size + size)
    assert refusal(path).endswith(CUT_SHORT)


@pytest.mark.parametrize("size", [1, 15])
def test_a_file_cut_before_it_says_what_it_is_is_no_database(path, size):
    os.truncate(path, size)
    assert refusal(path).endswith(NO_DATABASE)


def test_a_text_file_is_no_database(tmp_path):
    path = tmp_path / "notes.txt"
    path.write_text("The ferry to Ostrand is late.\n" * 300)
    assert refusal(path).endswith(NO_DATABASE)


def test_a_file_of_zeros_is_no_database(tmp_path):
    path = tmp_path / "zeros.db"
    path.write_bytes(bytes(3 * PAGE))
    assert refusal(path).endswith(NO_DATABASE)


def test_a_folder_is_no_database(tmp_path):
    path = tmp_path / "vanner.db"
    path.mkdir()
    assert refusal(path).endswith("is not a regular file; name another.")


def test_a_pipe_is_no_database_and_is_not_waited_for(tmp_path):
    path = tmp_path / "pipe"
    os.mkfifo(path)
    assert refusal(path).endswith("is not a regular file; name another.")


def test_a_missing_folder_is_told_and_not_made(tmp_path):
    path = tmp_path / "nowhere" / "vanner.db"
    with pytest.raises(DatabaseError, match=r"there is no folder .+/nowhere; make it first\."):
        Database.open(path)
    assert list(tmp_path.iterdir()) == []


def test_a_path_through_a_file_is_told_as_a_missing_folder(path):
    with pytest.raises(DatabaseError, match=r"there is no folder .+/vanner\.db; make it first\."):
        Database.open(path / "more.db")


def test_a_name_that_is_too_long_is_told(tmp_path):
    with pytest.raises(DatabaseError, match=r"cannot be read \(File name too long\)"):
        Database.open(tmp_path / ("x" * 300))


def test_the_home_of_an_unknown_user_is_told(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    with pytest.raises(DatabaseError, match=r"~nobody-of-this-name/vanner\.db is in no known home"):
        Database.open(Path("~nobody-of-this-name/vanner.db"))


@pytest.mark.parametrize("application_id", [0, 1, 0x7FFFFFFF, -5])
@pytest.mark.parametrize("journal", ["DELETE", "WAL"])
def test_another_programs_database_is_refused(tmp_path, application_id, journal):
    path = tmp_path / "ledger.db"
    with closing(sqlite3.connect(path)) as connection:
        connection.execute(f"PRAGMA journal_mode = {journal}")
        connection.execute(f"PRAGMA application_id = {application_id}")
        connection.execute("CREATE TABLE ledger (entry TEXT)")
    assert refusal(path).endswith(FOREIGN)


def test_another_programs_database_in_use_is_refused_though_its_header_is_behind(tmp_path):
    """Its version table even names a revision that is ours too."""
    path = tmp_path / "ledger.db"
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("PRAGMA journal_mode = WAL")
        connection.execute("CREATE TABLE alembic_version (version_num TEXT)")
        connection.execute("INSERT INTO alembic_version VALUES ('0001')")
        connection.commit()
        assert path.with_name("ledger.db-wal").stat().st_size > 0
        assert refusal(path).endswith(FOREIGN)
        tables = connection.execute("SELECT name FROM sqlite_master").fetchall()
        assert tables == [("alembic_version",)]


def test_another_programs_database_with_our_number_but_no_version_is_refused(tmp_path):
    path = tmp_path / "ledger.db"
    with closing(sqlite3.connect(path)) as connection:
        connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.execute("CREATE TABLE ledger (entry TEXT)")
    assert refusal(path).endswith(FOREIGN)


def test_garbage_after_the_magic_is_refused(path):
    """The rest of the header is all ones, so that every field of it is out of range."""
    path.write_bytes(b"SQLite format 3\0" + b"\xff" * 4 * PAGE)
    assert refusal(path).endswith(FOREIGN)


def test_a_file_that_holds_the_magic_and_zeros_is_refused(path):
    """Without an application id or a table it looks new, but no page can have zero bytes."""
    path.write_bytes(b"SQLite format 3\0" + bytes(4 * PAGE))
    with pytest.raises(DatabaseError, match="cannot be used: it is no SQLite database"):
        Database.open(path)
    assert path.read_bytes() == b"SQLite format 3\0" + bytes(4 * PAGE)


def test_another_programs_database_that_is_cut_short_is_still_another_programs(tmp_path):
    path = tmp_path / "ledger.db"
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("CREATE TABLE ledger (entry TEXT)")
    os.truncate(path, PAGE)
    assert refusal(path).endswith(FOREIGN)


def test_garbage_between_the_magic_and_our_number_is_refused(path):
    garbled = bytearray(path.read_bytes())
    garbled[16:24] = b"\xff" * 8
    garbled[28:32] = bytes(4)
    path.write_bytes(garbled)
    assert refusal(path).endswith("cannot be used: it is no SQLite database; name another file.")


@pytest.mark.parametrize("start", [100, PAGE])
def test_a_database_with_garbled_pages_is_told_as_damaged(path, start):
    garbled = bytearray(path.read_bytes())
    garbled[start:] = b"\xa5" * (len(garbled) - start)
    path.write_bytes(garbled)
    assert refusal(path).endswith(DAMAGED)


def test_a_page_damaged_deep_inside_is_told_when_it_is_read(path):
    database = Database.open(path)
    with database.write() as connection:
        for number in range(200):
            connection.exec_driver_sql(
                "INSERT INTO source_state (source, kind, cursor, failures) "
                "VALUES (?, 'feed', ?, 0)",
                (f"source {number}", "x" * 500),
            )
    with database.read() as connection:
        query = "SELECT rootpage FROM sqlite_master WHERE name = 'source_state'"
        root = connection.exec_driver_sql(query).scalar()
    database.close()
    garbled = bytearray(path.read_bytes())
    garbled[(root - 1) * PAGE : root * PAGE] = b"\xa5" * PAGE
    path.write_bytes(garbled)
    database = Database.open(path, create=False, migrate=False)
    with pytest.raises(DatabaseError) as caught, database.read() as connection:
        connection.exec_driver_sql("SELECT * FROM source_state").fetchall()
    assert str(caught.value) == f"The database {path} {DAMAGED}"
    database.close()
    assert path.read_bytes() == garbled
