import json

import httpx
import pytest
from structlog.testing import capture_logs

from vanner.errors import SourceError
from vanner.settings import FeedSettings, Secret
from vanner.sources.feed import FeedSource, FetchLimits
from vanner.sources.feed.source import shown

NOW_S = 1930982400.0
XML = {"Content-Type": "application/rss+xml"}


def rss(*guids):
    items = "".join(f"<item><guid>{guid}</guid><title>{guid}</title></item>" for guid in guids)
    return f'<rss version="2.0"><channel><title>Hafen</title>{items}</channel></rss>'.encode()


@pytest.fixture
def make():
    """Make a source of an address; all of them share one client, which is closed at the end."""
    with httpx.Client(trust_env=False) as client:

        def make(url, limits=None, **settings):
            named = {"name": "harbour", "kind": "feed", "url": url} | settings
            return FeedSource(FeedSettings(**named), client=client, limits=limits)

        yield make


def guids(poll):
    return [item.guid for item in poll.items]


def failure(source, cursor=None):
    with pytest.raises(SourceError) as raised:
        source.poll(cursor or {}, NOW_S)
    return raised.value


def test_the_first_poll_only_teaches_and_later_ones_count(http_server, make):
    source = make(http_server.set("/f", rss("b", "a"), headers=XML))
    first = source.poll({}, NOW_S)
    assert (guids(first), first.teaches) == (["a", "b"], True)
    http_server.set("/f", rss("c", "b", "a"), headers=XML)
    second = source.poll(first.cursor, NOW_S)
    assert (guids(second), second.teaches) == (["a", "b", "c"], False)


def test_a_first_poll_that_failed_leaves_the_teaching_to_the_next(http_server, make):
    source = make(http_server.set("/f", b"<rss version='2.0'><channel><ti"))
    assert "holds no entry that can be read" in str(failure(source))
    http_server.set("/f", rss("a"), headers=XML)
    assert source.poll({}, NOW_S).teaches


def test_a_feed_that_is_empty_at_first_has_taught_all_the_same(http_server, make):
    source = make(http_server.set("/f", rss(), headers=XML))
    cursor = source.poll({}, NOW_S).cursor
    http_server.set("/f", rss("a"), headers=XML)
    assert not source.poll(cursor, NOW_S).teaches


def test_a_changed_address_begins_anew(http_server, make):
    cursor = make(http_server.set("/f", rss("a"), headers=XML | {"ETag": '"1"'})).poll({}, NOW_S)
    moved = make(http_server.set("/g", rss("b"), headers=XML)).poll(cursor.cursor, NOW_S)
    assert moved.teaches
    assert "If-None-Match" not in http_server.requests[-1].headers


def test_validators_make_the_next_poll_conditional_and_304_brings_nothing(http_server, make):
    date = "Tue, 11 Mar 2031 08:00:00 GMT"
    source = make(http_server.set("/f", rss("a"), headers={"ETag": '"1"', "Last-Modified": date}))
    first = source.poll({}, NOW_S)
    http_server.set("/f", status=304)
    second = source.poll(json.loads(json.dumps(first.cursor)), NOW_S)
    assert (second.items, second.teaches, second.faults) == ((), False, ())
    assert http_server.requests[-1].headers["If-None-Match"] == '"1"'
    assert http_server.requests[-1].headers["If-Modified-Since"] == date
    source.poll(second.cursor, NOW_S)
    assert http_server.requests[-1].headers["If-None-Match"] == '"1"'


def test_a_poll_that_failed_does_not_move_the_validators(http_server, make):
    source = make(http_server.set("/f", rss("a"), headers={"ETag": '"1"'}))
    cursor = source.poll({}, NOW_S).cursor
    http_server.set("/f", b"<html>upkeep</html>", headers={"ETag": '"2"'})
    failure(source, cursor)
    http_server.set("/f", rss("b", "a"), headers={"ETag": '"3"'})
    assert guids(source.poll(cursor, NOW_S)) == ["a", "b"]
    assert http_server.requests[-1].headers["If-None-Match"] == '"1"'


def test_304_to_an_unconditional_request_is_an_error(http_server, make):
    assert "HTTP status 304" in str(failure(make(http_server.set("/f", status=304))))


def test_a_validator_that_cannot_be_sent_back_is_not_kept(http_server, make):
    source = make(http_server.set("/f", rss("a"), headers={"ETag": '"' + "x" * 2000 + '"'}))
    cursor = source.poll({}, NOW_S).cursor
    assert "etag" not in cursor
    source.poll(cursor, NOW_S)


def test_a_feed_that_moved_for_good_is_asked_at_its_new_address(http_server, make):
    http_server.set("/new", rss("a"), headers=XML)
    source = make(http_server.set("/old", status=301, headers={"Location": "/new"}))
    cursor = source.poll({}, NOW_S).cursor
    for _ in range(2):
        poll = source.poll(cursor, NOW_S)
        assert not poll.teaches
        cursor = poll.cursor
    assert [request.path for request in http_server.requests] == ["/old", "/new", "/new", "/new"]


def test_a_feed_that_is_elsewhere_for_now_is_asked_at_its_own_address(http_server, make):
    http_server.set("/new", rss("a"), headers=XML)
    source = make(http_server.set("/old", status=302, headers={"Location": "/new"}))
    source.poll(source.poll({}, NOW_S).cursor, NOW_S)
    assert [request.path for request in http_server.requests] == ["/old", "/new", "/old", "/new"]


def test_a_move_to_what_is_no_feed_is_not_remembered(http_server, make):
    http_server.set("/portal", b"<html>Log in</html>")
    source = make(http_server.set("/f", status=301, headers={"Location": "/portal"}))
    failure(source)
    http_server.set("/f", rss("a"), headers=XML)
    assert guids(source.poll({}, NOW_S)) == ["a"]


def test_a_feed_that_is_gone_stops_with_a_warning(http_server, make):
    source = make(http_server.set("/f", rss("a"), headers=XML))
    cursor = source.poll({}, NOW_S).cursor
    url = http_server.set("/f", status=410)
    with capture_logs() as logs:
        poll = source.poll(cursor, NOW_S)
    assert poll.items == ()
    assert poll.cursor == cursor
    assert "harbour" in poll.stopped
    assert logs == [{"event": "feed_gone", "log_level": "warning", "source": "harbour", "url": url}]


@pytest.mark.parametrize("status", [429, 503])
@pytest.mark.parametrize("value", ["90", "Tue, 11 Mar 2031 08:01:30 GMT"])
def test_a_refusal_tells_when_to_ask_again(http_server, make, status, value):
    source = make(http_server.set("/f", status=status, headers={"Retry-After": value}))
    assert failure(source).retry_at_s == NOW_S + 90


def test_a_success_may_ask_for_a_pause_as_well(http_server, make):
    source = make(http_server.set("/f", rss("a"), headers={"Retry-After": "90"}))
    assert source.poll({}, NOW_S).retry_at_s == NOW_S + 90


@pytest.mark.parametrize("value", [None, "soon"])
def test_without_a_readable_pause_none_is_asked_for(http_server, make, value):
    headers = {"Retry-After": value} if value else {}
    assert failure(make(http_server.set("/f", status=503, headers=headers))).retry_at_s is None


@pytest.mark.parametrize("status", [204, 206, 302, 400, 401, 403, 404, 418, 429, 500, 503])
def test_every_other_status_is_an_error_that_names_source_address_and_status(
    http_server, make, status
):
    url = http_server.set("/f", status=status)
    text = str(failure(make(url)))
    assert "harbour" in text
    assert url in text
    assert str(status) in text


BAD_BODIES = {
    "empty": b"",
    "blank": b"\n\n",
    "no xml": b"Upkeep until noon",
    "bytes": bytes(range(256)),
    "web page": b"<!DOCTYPE html><html><head><title>Portal</title></head><body/></html>",
    "json": b'{"error": 5}',
    "cut off": b"<rss version='2.0'><chan",
    "entities": b'<!DOCTYPE a [<!ENTITY a "aa"><!ENTITY b "&a;&a;">]><a>&b;</a>',
}


@pytest.mark.parametrize("body", BAD_BODIES.values(), ids=BAD_BODIES)
def test_what_is_no_feed_is_one_sentence_that_says_what_to_do(http_server, make, body):
    url = http_server.set("/f", body, headers=XML)
    text = str(failure(make(url)))
    assert text.startswith(f'The feed "harbour" ({url}): ')
    assert text.endswith(".")
    assert "; " in text
    assert "\n" not in text


def test_a_fault_of_a_feed_that_can_be_read_is_a_sentence_of_the_poll(http_server, make):
    url = http_server.set("/f", rss("a") + b"<junk", headers=XML)
    poll = make(url).poll({}, NOW_S)
    assert guids(poll) == ["a"]
    (fault,) = poll.faults
    assert fault.startswith(f'The feed "harbour" ({url}): it is not well-formed')


def test_the_settings_language_stands_in_for_a_missing_one(http_server, make):
    source = make(http_server.set("/f", rss("a"), headers=XML), language="nl")
    assert source.poll({}, NOW_S).items[0].language == "nl"


def test_the_limits_of_the_source_hold(http_server, make):
    url = http_server.set("/f", rss("a"), headers=XML)
    assert "larger than" in str(failure(make(url, FetchLimits(body_bytes=10))))


def test_name_and_password_are_sent_and_read_anew_each_time(http_server, make, tmp_path):
    secret = tmp_path / "password"
    secret.write_text("salt\n")
    url = http_server.set("/f", rss("a"), headers=XML)
    source = make(url, username="desk", password=Secret(file=secret))
    source.poll({}, NOW_S)
    secret.write_text("pepper\n")
    source.poll({}, NOW_S)
    sent = [request.headers["Authorization"] for request in http_server.requests]
    assert sent == ["Basic ZGVzazpzYWx0", "Basic ZGVzazpwZXBwZXI="]


def test_a_password_never_reaches_the_host_that_a_feed_has_moved_to(http_server, make, tmp_path):
    secret = tmp_path / "password"
    secret.write_text("salt")
    other = http_server.set("/new", rss("a"), headers=XML).replace("127.0.0.1", "localhost")
    url = http_server.set("/old", status=301, headers={"Location": other})
    source = make(url, username="desk", password=Secret(file=secret))
    source.poll(source.poll({}, NOW_S).cursor, NOW_S)
    first, *later = http_server.requests
    assert "Authorization" in first.headers
    assert [request.headers["Authorization"] for request in later] == [None, None]


def test_a_missing_password_is_a_failed_poll_that_names_the_place(http_server, make, tmp_path):
    url = http_server.set("/f", rss("a"), headers=XML)
    source = make(url, username="desk", password=Secret(file=tmp_path / "none"))
    assert str(tmp_path / "none") in str(failure(source))
    assert http_server.requests == []


def test_errors_show_no_password_or_key_of_an_address(http_server, make):
    base = http_server.set("/f", status=500)
    url = base.replace("://", "://desk:salt@") + "?key=pepper"
    text = str(failure(make(url)))
    assert "salt" not in text
    assert "pepper" not in text
    assert shown(url) == base


def test_a_client_that_was_handed_in_stays_open(http_server):
    with httpx.Client(trust_env=False) as client:
        settings = FeedSettings(name="harbour", kind="feed", url=http_server.set("/f", rss("a")))
        FeedSource(settings, client=client).close()
        assert not client.is_closed


def test_a_source_works_with_a_client_of_its_own(http_server, monkeypatch):
    monkeypatch.setenv("NO_PROXY", "127.0.0.1")
    settings = FeedSettings(name="harbour", kind="feed", url=http_server.set("/f", rss("a")))
    source = FeedSource(settings)
    assert guids(source.poll({}, NOW_S)) == ["a"]
    source.close()
