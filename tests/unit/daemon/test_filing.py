"""Filing digests in folders: once, and again where a folder refused."""

from dataclasses import replace

import pytest
from structlog.testing import capture_logs

from vanner.daemon.posting import Postman
from vanner.store.digest_content import DigestRow, keep_digest

NOW_S = 1_700_006_400.0


@pytest.fixture
def database(open_database):
    return open_database()


@pytest.fixture
def digest(database):
    """Keeps a digest that is not filed yet."""

    def keep(desk="quay", slot="2023-11-15T07:00"):
        row = DigestRow(
            desk, "0 7 * * *", slot, NOW_S, NOW_S - 100, NOW_S, "Morning", "All quiet.", "<p></p>"
        )
        with database.write() as connection:
            keep_digest(connection, row, filed=False)

    return keep


@pytest.fixture
def clerk(database, plan, tmp_path):
    """A postman without mail whose desk files digests into a folder."""
    filing = replace(plan("quay"), digest_folder=tmp_path / "digests")
    return Postman(database, (filing, plan("mole")), None, None, lambda: NOW_S)


def test_a_digest_is_filed_once(clerk, digest, tmp_path):
    digest()
    with capture_logs() as logs:
        clerk.round()
    files = sorted((tmp_path / "digests").iterdir())
    assert [one.name for one in files] == ["quay-2023-11-15-0700.html", "quay-2023-11-15-0700.txt"]
    assert files[1].read_text() == "Morning\n\nAll quiet."
    assert logs == [
        {
            "event": "digest_filed",
            "log_level": "info",
            "desk": "quay",
            "slot": "2023-11-15T07:00",
        }
    ]
    for one in files:
        one.unlink()
    clerk.round()
    assert list((tmp_path / "digests").iterdir()) == []


def test_a_desk_without_a_folder_files_nothing(clerk, digest, tmp_path):
    digest("mole")
    with capture_logs() as logs:
        clerk.round()
    assert logs == []
    assert not (tmp_path / "digests").exists()


def test_a_digest_that_cannot_be_written_is_tried_again_and_holds_no_other_up(
    clerk, digest, tmp_path
):
    (tmp_path / "digests").write_text("in the way")
    digest()
    digest(slot="2023-11-15T15:00")
    with capture_logs() as logs:
        clerk.round()
    assert [(one["event"], one["desk"]) for one in logs] == [("digest_not_filed", "quay")] * 2
    (tmp_path / "digests").unlink()
    clerk.round()
    assert len(list((tmp_path / "digests").glob("*.txt"))) == 2
