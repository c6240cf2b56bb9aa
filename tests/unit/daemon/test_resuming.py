"""What a start makes of sources that had stopped or asked to be left alone."""

import pytest

from vanner.store.source_states import keep_cursor, note_failure, resume, stopped_reason

NOW_S = 1_700_006_400.0


@pytest.fixture
def database(open_database):
    return open_database()


def test_a_source_that_had_stopped_is_polled_again_after_a_start(database):
    with database.write() as connection:
        keep_cursor(connection, "wire", "feed", {}, NOW_S, stopped="The feed is gone for good.")
        keep_cursor(connection, "other", "feed", {}, NOW_S, stopped="The feed is gone for good.")
        assert resume(connection, ["wire"]) == {}
        assert stopped_reason(connection, "wire") is None
        assert stopped_reason(connection, "other") is not None


def test_what_a_source_asked_outlives_a_restart_until_it_is_polled(database):
    with database.write() as connection:
        note_failure(connection, "wire", "feed", NOW_S, "Too many requests.", NOW_S + 900.0)
        keep_cursor(connection, "mast", "feed", {}, NOW_S, not_before_s=NOW_S + 60.0)
        assert resume(connection, ["wire", "mast", "new"]) == {
            "wire": NOW_S + 900.0,
            "mast": NOW_S + 60.0,
        }
        keep_cursor(connection, "wire", "feed", {}, NOW_S + 901.0)
        assert resume(connection, ["wire"]) == {}
