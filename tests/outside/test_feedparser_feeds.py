"""The feeds inside feedparser's own source distribution, read by our parser.

Source: the folders `tests/wellformed` and `tests/illformed` of the sdist of feedparser
(BSD-2-Clause), which the test runner unpacks into `feedparser/` within the folder that the
environment variable VANNER_TEST_DATA names. Each file's first comment holds the value that
feedparser's authors expect; the values compared here are theirs.
"""

import ast
import calendar
import os
import re
from collections import Counter
from pathlib import Path
from urllib.parse import urljoin

import pytest

from vanner.sources.feed.parse import UnreadableFeedError, parse_feed

# Where feedparser's tests serve the files, which some expected values show.
BASE = "http://127.0.0.1:8097/tests/"
# Fewer feeds or values than this would mean that the check looks at the wrong files.
FEEDS_AT_LEAST = 1500
VALUES_AT_LEAST = 150

# Without an element, or in a format (CDF) that is neither RSS, Atom nor RDF and without items.
NO_FEEDS = {
    "illformed/rss_empty_document.xml",
    "wellformed/cdf/channel_abstract_map_description.xml",
    "wellformed/cdf/channel_abstract_map_tagline.xml",
    "wellformed/cdf/channel_href_map_link.xml",
    "wellformed/cdf/channel_href_map_links.xml",
    "wellformed/cdf/channel_lastmod.xml",
    "wellformed/cdf/channel_lastmod_parsed.xml",
    "wellformed/cdf/channel_title.xml",
}

# Where we differ on purpose.
DIFFERENT = {
    # A type that need not be text: we take no content from it.
    "wellformed/atom10/entry_content_base64.xml",
    "wellformed/atom10/entry_content_base64_2.xml",
    # feedparser's sanitiser writes a bare "&" of HTML as "&amp;", which means the same.
    "wellformed/atom10/qna.xml",
}

HEADER = re.compile(rb"^Header:\s+([^:]+):(.+)$", re.MULTILINE)
EXPECTED = re.compile(rb"^Expect:\s+(.+?)\s*$", re.MULTILINE)
END = re.compile(rb"</(entry|item)>", re.IGNORECASE)
SIMPLE = re.compile(
    r"entries\[0\](?:\.|\[')(?P<field>title|link|id|guid|published_parsed|updated_parsed"
    r"|title_detail'\]\['value|content'\]\[0\]\['value)(?:'\])? == "
    r"(?P<value>u?'(?:[^'\\]|\\.)*'|u?\"(?:[^\"\\]|\\.)*\"|\([\d, ]+\))"
)


@pytest.fixture(scope="module")
def feeds():
    """The body and the headers of each feed by its path within feedparser's tests."""
    place = os.environ.get("VANNER_TEST_DATA")
    tests = Path(place) / "feedparser" / "tests" if place else None
    if tests is None or not tests.is_dir():
        reason = "VANNER_TEST_DATA names no folder that holds feedparser's unpacked sdist"
        if os.environ.get("CI") == "true":
            pytest.fail(reason)
        pytest.skip(reason)
    found = {}
    for kind in ("wellformed", "illformed"):
        for path in sorted((tests / kind).rglob("*.xml")):
            body = path.read_bytes()
            headers = {
                name.decode().strip().lower(): value.decode().strip()
                for name, value in HEADER.findall(body)
            }
            found[path.relative_to(tests).as_posix()] = (body, headers)
    assert len(found) >= FEEDS_AT_LEAST
    return found


def base_of(path, headers):
    return urljoin(BASE + path, headers.get("content-location", ""))


def parsed(path, body, headers):
    kind = headers.get("content-type", "application/xml")
    return parse_feed(body, content_type=kind, base_url=base_of(path, headers))


def test_every_feed_is_read_without_an_exception(feeds):
    refused = set()
    for path, (body, headers) in feeds.items():
        try:
            parsed(path, body, headers)
        except UnreadableFeedError:
            refused.add(path)
    assert refused == NO_FEEDS


def expectations(path, body):
    """The simple expectations of a file about its first entry, as (field, value).

    Left out is markup that feedparser makes safe or whose links it makes absolute: our
    parser hands markup on as it stood, for intake to take the text from.
    """
    found = EXPECTED.search(body)
    if found is None or path in DIFFERENT or path.startswith("wellformed/sanitize/"):
        return []
    relative = path.startswith("wellformed/base/")
    terms = found[1].decode("utf-8", "replace").split(" and ")
    matches = [match for match in map(SIMPLE.fullmatch, map(str.strip, terms)) if match]
    values = [
        (match["field"].partition("'")[0], ast.literal_eval(match["value"])) for match in matches
    ]
    return [(field, value) for field, value in values if not (relative and "<" in value)]


def ours(field, item, base):
    """What our item holds for a field of feedparser's entry."""
    return {
        "title": item.title,
        "title_detail": item.title,
        "link": item.url,
        # We keep a relative identifier as it stands, so that no redirect changes it.
        "id": urljoin(base, item.guid) if (item.guid or "").startswith("/") else item.guid,
        "guid": item.guid,
        "content": item.content_html or item.content_text,
        "published_parsed": item.published_s,
        "updated_parsed": item.published_s,
    }[field]


def test_every_simple_value_of_a_first_entry_is_the_expected_one(feeds):
    checked, wrong = Counter(), []
    for path, (body, headers) in feeds.items():
        for field, value in expectations(path, body):
            dated = field.endswith("_parsed")
            # An entry that holds nothing but a date is left out, so it is given a title.
            titled = END.sub(rb"<title>t</title></\1>", body) if dated else body
            item = parsed(path, titled, headers).items[0]
            expected = calendar.timegm(value) if dated else value
            found = ours(field, item, base_of(path, headers))
            checked[field] += 1
            if found != expected:
                wrong.append((path, field, expected, found))
    assert wrong == []
    assert sum(checked.values()) >= VALUES_AT_LEAST
    assert min(checked[field] for field in ("title", "link", "id", "published_parsed")) >= 5
