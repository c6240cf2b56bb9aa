"""vanner init and vanner check."""

import pytest

FEED = """\
<?xml version="1.0"?><rss version="2.0"><channel><title>Wire</title>
<item><guid>1</guid><title>Ferry aground</title>
<pubDate>Sat, 18 Nov 2023 12:00:00 GMT</pubDate></item>
<item><guid>2</guid><title>Tide tables</title>
<pubDate>Sat, 18 Nov 2023 11:00:00 GMT</pubDate></item>
</channel></rss>"""


@pytest.fixture
def feed_settings(settings):
    """Writes settings whose desks read one feed at an address."""

    def write(url, more=""):
        source = f'[[source]]\nname = "wire"\nkind = "feed"\nurl = "{url}"\n{more}'
        return settings(source, folder=False)

    return write


def test_a_file_that_init_wrote_has_no_fault(vanner, tmp_path):
    made = vanner("init")
    assert (made.status, made.err) == (0, "")
    assert made.out == "vanner.toml written. Edit it, then run: vanner check\n"
    checked = vanner("check")
    assert (checked.status, checked.err) == (0, "")
    assert checked.out.splitlines() == [
        "vanner.toml: no fault; 1 desk, 1 source.",
        f"  inbox (folder): no folder {tmp_path / 'inbox'} yet; the daemon will make it",
    ]


def test_init_names_the_check_of_the_file_that_it_wrote(vanner):
    told = vanner("init", "night desk.toml").out
    assert told.endswith("run: vanner check --settings 'night desk.toml'\n")


def test_init_never_replaces_a_file(vanner, tmp_path):
    (tmp_path / "vanner.toml").write_text("keep me")
    ended = vanner("init")
    assert (ended.status, ended.out) == (2, "")
    assert ended.err.startswith("vanner: vanner.toml is there already")
    assert (tmp_path / "vanner.toml").read_text() == "keep me"


def test_check_of_a_feed_says_what_it_saw(vanner, feed_settings, http_server):
    feed_settings(http_server.set("/feed", FEED.encode()))
    ended = vanner("check")
    assert (ended.status, ended.err) == (0, "")
    assert ended.out.splitlines()[1] == (
        "  wire (feed): 2 entries, the newest of 2023-11-18T12:00:00Z"
    )
    assert [request.path for request in http_server.requests] == ["/feed"]


def test_check_takes_nothing_in(vanner, feed_settings, http_server, tmp_path):
    feed_settings(http_server.set("/feed", FEED.encode()))
    vanner("check")
    assert [one.name for one in tmp_path.iterdir()] == ["vanner.toml"]


def test_a_source_that_fails_is_told_and_exits_with_one(vanner, feed_settings, http_server):
    url = http_server.set("/good", FEED.encode())
    more = f'[[source]]\nname = "gone"\nkind = "feed"\nurl = "{http_server.url("/gone")}"\n'
    feed_settings(url, more)
    ended = vanner("check")
    assert ended.status == 1
    good, gone = ended.out.splitlines()[1:]
    assert good.startswith("  wire (feed): 2 entries")
    assert gone.startswith("  gone (feed): FAILED: ")
    assert "HTTP status 404" in gone
    assert ended.err == "vanner: 1 of 2 sources failed; see the lines above.\n"


def test_a_feed_that_is_gone_for_good_counts_as_failed(vanner, feed_settings, http_server):
    feed_settings(http_server.set("/feed", status=410))
    ended = vanner("check")
    assert ended.status == 1
    assert "FAILED" in ended.out


def test_an_address_where_nothing_listens_is_told(vanner, feed_settings):
    feed_settings("http://127.0.0.1:9/feed")  # the discard port, which no test server has
    ended = vanner("check")
    assert ended.status == 1
    assert ended.out.splitlines()[1].startswith("  wire (feed): FAILED: ")
    assert ended.err.count("\n") == 1


def test_a_folder_is_counted_and_left_as_it_is(vanner, settings, tmp_path):
    settings()
    (tmp_path / "inbox").mkdir()
    for name in ("a.txt", "b.broken", ".hidden"):
        (tmp_path / "inbox" / name).write_text("tide")
    ended = vanner("check")
    assert (ended.status, ended.err) == (0, "")
    assert ended.out.splitlines()[1] == f"  inbox (folder): 2 files waiting in {tmp_path / 'inbox'}"
    assert sorted(one.name for one in (tmp_path / "inbox").iterdir()) == [
        ".hidden",
        "a.txt",
        "b.broken",
    ]


def test_a_folder_that_is_a_file_fails(vanner, settings, tmp_path):
    settings()
    (tmp_path / "inbox").write_text("no folder")
    ended = vanner("check")
    assert ended.status == 1
    assert "is no folder; name a directory." in ended.out


MAIL = '[mail]\nhost = "mail.example"\nsender = "desk@port.example"\nusername = "desk"\n'


def test_a_secret_of_the_mail_that_is_not_set_is_a_fault(vanner, settings):
    settings(MAIL + 'password = { env = "MAIL_SECRET" }\n')
    ended = vanner("check")
    assert ended.status == 2
    assert ended.err.startswith("vanner: The environment variable MAIL_SECRET is not set")


def test_the_mail_server_is_named_and_its_secret_is_not(vanner, settings, monkeypatch):
    monkeypatch.setenv("MAIL_SECRET", "tarpaulin-9")
    settings(MAIL + 'password = { env = "MAIL_SECRET" }\n')
    ended = vanner("check")
    assert (ended.status, ended.err) == (0, "")
    assert ended.out.splitlines()[-1] == (
        "  mail: by mail.example:587 as desk@port.example; the server is not tried"
    )
    assert "tarpaulin-9" not in ended.out


def test_a_secret_of_a_feed_that_is_not_set_fails_its_source(vanner, feed_settings, http_server):
    url = http_server.set("/feed", FEED.encode())
    feed_settings(url, 'username = "desk"\npassword = { env = "FEED_SECRET" }\n')
    ended = vanner("check")
    assert ended.status == 1
    assert "FAILED" in ended.out
    assert "FEED_SECRET is not set" in ended.out
