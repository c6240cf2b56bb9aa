import pytest

from vanner.sources.feed.parse import UnreadableFeedError, parse_feed

BASE = "http://wire.example/feeds/harbour.xml"
NINE_S = 1930982400.0  # 2031-03-11 08:00:00 UTC
TEN_S = NINE_S + 3600


def parsed(body, **named):
    data = body.encode() if isinstance(body, str) else body
    return parse_feed(data, **{"content_type": "application/xml", "base_url": BASE} | named)


def rss(items, channel=""):
    return f'<rss version="2.0"><channel><title>Hafen</title>{channel}{items}</channel></rss>'


def atom(entries, attributes=""):
    return f'<feed xmlns="http://www.w3.org/2005/Atom" {attributes}>{entries}</feed>'


def only(body, **named):
    (item,) = parsed(body, **named).items
    return item


RSS_ITEM = """<item><guid isPermaLink="false">h-1</guid><title>Ferry &amp;amp; tug</title>
<link>/news/1</link><description>&lt;p&gt;Fog in the port&lt;/p&gt;</description>
<pubDate>Tue, 11 Mar 2031 10:00:00 +0200</pubDate></item>"""


def test_an_rss_item_gives_all_its_fields():
    item = only(rss(RSS_ITEM, "<language>de-at</language>"))
    assert item.guid == "h-1"
    assert item.title == "Ferry &amp; tug"
    assert item.title_is_html
    assert item.content_html == "<p>Fog in the port</p>"
    assert item.content_text is None
    assert item.url == "http://wire.example/news/1"
    assert item.language == "de-at"
    assert item.date_raw == "Tue, 11 Mar 2031 10:00:00 +0200"
    assert item.published_s == NINE_S


def test_an_atom_entry_gives_all_its_fields():
    item = only(
        atom(
            """<entry xml:lang="nl"><id>tag:wire.example,2031:1</id><title>Tug &lt; ferry</title>
            <link rel="alternate" href="1.html"/><link rel="enclosure" href="http://x.example/a"/>
            <content type="html">&lt;p&gt;Fog&lt;/p&gt;</content><summary>short</summary>
            <updated>2031-03-11T09:00:00Z</updated><published>2031-03-11T08:00:00Z</published>
            </entry>""",
            'xml:lang="en"',
        )
    )
    assert item.guid == "tag:wire.example,2031:1"
    assert (item.title, item.title_is_html) == ("Tug < ferry", False)
    assert item.content_html == "<p>Fog</p>"
    assert item.url == "http://wire.example/feeds/1.html"
    assert item.language == "nl"
    assert (item.date_raw, item.published_s) == ("2031-03-11T08:00:00Z", NINE_S)


@pytest.mark.parametrize("kind", ["html", "xhtml"])
def test_an_atom_title_that_says_it_is_html_is_html(kind):
    inner = "<div xmlns='http://www.w3.org/1999/xhtml'>a <b>b</b></div>" if kind == "xhtml" else "a"
    assert only(
        atom(f"<entry><id>1</id><title type='{kind}'>{inner}</title></entry>")
    ).title_is_html


def test_plain_atom_text_is_not_html():
    item = only(atom("<entry><id>1</id><summary>2 &lt; 3</summary></entry>"))
    assert (item.content_text, item.content_html) == ("2 < 3", None)


def test_content_that_is_no_text_leaves_the_summary():
    entry = "<entry><id>1</id><content type='image/png'>aGk=</content><summary>s</summary></entry>"
    assert only(atom(entry)).content_text == "s"


def test_the_full_content_of_an_rss_item_goes_before_its_description():
    body = rss(
        "<item><guid>1</guid><description>short</description>"
        "<content:encoded xmlns:content='http://purl.org/rss/1.0/modules/content/'>"
        "<![CDATA[<p>long</p>]]></content:encoded></item>"
    )
    assert only(body).content_html == "<p>long</p>"


def test_rss_1_and_rss_091_are_feeds_too():
    rdf = """<rdf:RDF xmlns:rdf="http://www.w3.org/1999/02/22-rdf-syntax-ns#"
      xmlns="http://purl.org/rss/1.0/" xmlns:dc="http://purl.org/dc/elements/1.1/">
      <channel rdf:about="http://wire.example/"><title>t</title></channel>
      <item rdf:about="http://wire.example/1"><title>Fog</title><link>http://wire.example/1</link>
      <dc:date>2031-03-11T08:00:00Z</dc:date><dc:language>fr</dc:language></item></rdf:RDF>"""
    item = only(rdf)
    assert (item.guid, item.title, item.published_s) == ("http://wire.example/1", "Fog", NINE_S)
    old = '<rss version="0.91"><channel><item><title>Fog</title></item></channel></rss>'
    assert only(old).title == "Fog"


def test_without_an_id_the_link_identifies_an_item():
    assert only(rss("<item><link>http://wire.example/1</link></item>")).guid == (
        "http://wire.example/1"
    )


def test_without_id_and_link_the_guid_is_left_to_intake():
    assert only(rss("<item><title>Fog</title></item>")).guid is None


def test_a_relative_id_does_not_change_with_the_address_that_answered():
    body = rss("<item><guid>/news/1</guid></item>")
    assert only(body).guid == only(body, base_url="http://mirror.example/").guid == "/news/1"


def test_the_languages_of_feed_and_settings_stand_in_for_the_items_own():
    body = rss(RSS_ITEM, "<language>not a tag</language>")
    assert only(body, language="sv").language == "sv"
    assert only(rss(RSS_ITEM, "<language>en_GB</language>"), language="sv").language == "en-GB"
    assert only(rss(RSS_ITEM)).language is None


@pytest.mark.parametrize(
    "link", ["javascript:alert(1)", "mailto:a@b.example", "http://[", "data:,x"]
)
def test_a_link_that_is_no_web_address_is_no_url(link):
    assert only(rss(f"<item><guid>1</guid><link>{link}</link></item>")).url is None


def test_an_unreadable_date_is_kept_as_it_stood():
    item = only(rss("<item><title>Fog</title><pubDate>gestern abend</pubDate></item>"))
    assert (item.date_raw, item.published_s) == ("gestern abend", None)


def test_a_readable_update_stands_in_for_an_unreadable_publication():
    item = only(
        atom(
            "<entry><id>1</id><published>once</published>"
            "<updated>2031-03-11T08:00:00Z</updated></entry>"
        )
    )
    assert (item.date_raw, item.published_s) == ("2031-03-11T08:00:00Z", NINE_S)


def dated(guid, when):
    date = f"<pubDate>{when}</pubDate>" if when else ""
    return f"<item><guid>{guid}</guid>{date}</item>"


def test_items_come_oldest_first():
    body = rss(dated("b", "2031-03-11T09:00:00Z") + dated("a", "2031-03-11T08:00:00Z"))
    assert [item.guid for item in parsed(body).items] == ["a", "b"]
    body = rss(dated("a", "2031-03-11T08:00:00Z") + dated("b", "2031-03-11T09:00:00Z"))
    assert [item.guid for item in parsed(body).items] == ["a", "b"]


def test_without_dates_the_last_one_listed_comes_first():
    assert [i.guid for i in parsed(rss(dated("b", None) + dated("a", None))).items] == ["a", "b"]


def test_an_item_without_a_date_keeps_its_place_between_its_neighbours():
    body = rss(
        dated("c", "2031-03-11T09:00:00Z") + dated("b", None) + dated("a", "2031-03-11T08:00:00Z")
    )
    assert [item.guid for item in parsed(body).items] == ["a", "b", "c"]


def test_an_empty_feed_is_no_fault():
    feed = parsed(rss(""))
    assert (feed.items, feed.faults) == ((), ())


def test_an_entry_that_holds_nothing_is_left_out_and_its_neighbours_stay():
    feed = parsed(rss("<item><title>a</title></item><item/><item><title>b</title></item>"))
    assert [item.title for item in feed.items] == ["b", "a"]
    assert feed.faults == ("its entry 2 was left out (it holds no text and no link)",)


def test_the_faults_of_thousands_of_entries_stay_few():
    feed = parsed(rss("<item/>" * 5000))
    assert len(feed.faults) == 21
    assert feed.faults[-1] == "4980 more of its entries were left out"


@pytest.mark.parametrize(
    "broken",
    [
        rss("<item><title>Fog</title></item><item><title>Tug"),
        rss("<item><title>Fog &nbsp; & more</title></item>"),
        rss("<item><title>Fog</title><x:y>1</x:y></item>"),
        rss("<item><title>Fog</title><description>x</item><item><title>Tug</title></item>"),
        "notice\n" + rss("<item><title>Fog</title></item>"),
    ],
    ids=["cut off", "undefined entity", "undeclared prefix", "unclosed tag", "text before"],
)
def test_a_broken_feed_keeps_its_entries_and_tells_the_fault(broken):
    feed = parsed(broken)
    assert any(item.title.startswith("Fog") for item in feed.items)
    assert feed.faults


@pytest.mark.parametrize("reference", ["&#x110000;", "&#xD800;", "&#99999999999999999999;"])
def test_a_character_that_does_not_exist_costs_no_entry(reference):
    feed = parsed(
        rss(f"<item><title>a {reference} & b</title></item><item><title>b</title></item>")
    )
    assert len(feed.items) == 2


def test_a_wrong_charset_still_gives_the_text_and_tells_the_fault():
    text = "Паром задержан в порту Остров из-за сильного тумана"
    body = '<?xml version="1.0" encoding="utf-8"?>' + rss(f"<item><title>{text}</title></item>")
    feed = parsed(body.encode("cp1251"), content_type="text/xml; charset=utf-8")
    assert feed.items[0].title == text
    assert feed.faults == ("it declares the charset utf-8 and was read as cp1251",)


LAUGHS = "".join(f'<!ENTITY l{n} "{f"&l{n - 1};" * 10}">' for n in range(1, 10))


def test_a_billion_laughs_stay_unsaid_and_the_other_entries_are_kept():
    body = f'<!DOCTYPE rss [<!ENTITY l0 "ha">{LAUGHS}]>' + rss(
        "<item><title>&l9;</title></item><item><title>Fog</title></item>"
    )
    feed = parsed(body)
    assert "Fog" in [item.title for item in feed.items]
    assert max(len(item.title) for item in feed.items) < 100
    assert "entities that it defines were left out" in feed.faults


def test_an_external_entity_is_neither_read_nor_asked_for(tmp_path, http_server):
    secret = tmp_path / "secret.txt"
    secret.write_text("hidden words")
    there = http_server.set("/entity", b"hidden words")
    body = (
        f'<!DOCTYPE rss SYSTEM "{http_server.url("/dtd")}" [<!ENTITY f SYSTEM "{secret.as_uri()}">'
        f'<!ENTITY h SYSTEM "{there}">]>' + rss("<item><title>a &f; &h;</title></item>")
    )
    feed = parsed(body)
    assert "hidden" not in str(feed)
    assert http_server.requests == []
    assert len(feed.items) == 1


@pytest.mark.parametrize(
    "body", ["https://wire.example/feed", "file:///etc/hostname", "/etc/hostname"]
)
def test_a_body_that_is_an_address_or_a_path_is_not_followed(body):
    with pytest.raises(UnreadableFeedError, match="not XML"):
        parsed(body)


@pytest.mark.parametrize(
    ("body", "reason"),
    [
        (b"", "empty"),
        (b" \n", "empty"),
        (b"Service unavailable", "not XML"),
        (b"\x00\x01\x02\xff", "not XML"),
        (b"<html><head><title>Portal</title></head><body><p>Log in</p></body></html>", "neither"),
        (b"<svg xmlns='http://www.w3.org/2000/svg'/>", "neither"),
        (b"<a>" * 300_000, "more than 200000 tags"),
    ],
)
def test_what_is_no_feed_is_refused_with_the_reason(body, reason):
    with pytest.raises(UnreadableFeedError, match=reason):
        parsed(body)


# Each of these costs the parser behind ours minutes or gigabytes as it stands.
@pytest.mark.parametrize(
    "body",
    [
        rss(f"<item><title>Fog</title><author>{'a' * 1_000_000}</author></item>"),
        rss(
            "<item><title>Fog</title>"
            + "".join(f"<category>{n}</category>" for n in range(20_000))
            + "</item>"
        ),
        '<?xml version="1.0"?>' + "\n" * 2_000_000 + rss("<item><title>Fog</title></item>"),
        atom(
            "<entry><title>Fog</title><content type='xhtml'>"
            + "\n" * 2_000_000
            + "</content></entry>"
        ),
    ],
    ids=["long author", "many categories", "blank head", "blank content"],
)
def test_what_would_take_quadratic_time_is_read(body):
    assert only(body).title == "Fog"
