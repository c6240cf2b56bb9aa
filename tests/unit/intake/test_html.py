"""HTML as text."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.intake.html import Page, read_page
from vanner.intake.markup import is_heavy, simplified


def text(document):
    return read_page(document).text


@pytest.mark.parametrize(
    ("document", "expected"),
    [
        ("plain text", "plain text"),
        ("a &amp; b &lt;c&gt; &eacute;&#233;&#xe9;", "a & b <c> ééé"),
        ("one<br>two<BR/>three", "one\ntwo\nthree"),
        ("<p>one</p><p>two", "one\ntwo"),
        ("<div>one</div>two<div>three</div>", "one\ntwo\nthree"),
        ("<ul><li>one<li>two</ul>", "one\ntwo"),
        ("<table><tr><td>a</td><td>b</td></tr><tr><th>c</table>d", "a\nb\nc\nd"),
        ("<b>one</b> <i>two</i><span>three</span>", "one twothree"),
        ("<p> much   white\n\tspace\u00a0here </p>", "much white space here"),
        ('a<script>if (a<b && c=="</p>") x()</script>b', "ab"),
        ("a<style>p > a { }</style><template><p>t</template>b", "ab"),
        ("a<noscript>switch it on</noscript><svg><title>t</title></svg>b", "ab"),
        ("a<!-- <p>comment</p> -->b<!--[if mso]>x<![endif]-->c<!-->d", "abcd"),
        ("<p title='a>b' data-x=\"</p>\">kept</p>", "kept"),
        ("<p it's>it's \"kept\"</p>", 'it\'s "kept"'),
        ("<p><o:p>office</o:p></p>", "office"),
        ("a < b and c > d", "a < b and c > d"),
        ("<textarea>a <b> c</textarea>", "a <b> c"),
        ("<!DOCTYPE html><?xml version='1'?><p>kept", "kept"),
        ("<script>never closed <p>text", ""),
        ("cut <a href='never closed>text", "cut"),
        ("<frameset><frame></frameset>", ""),
        ("", ""),
        ("a\x1eb<br>c\0d", "a\nb\ncd"),
    ],
)
def test_text_is_taken_out_of_html(document, expected):
    assert text(document) == expected


def test_the_title_element_is_the_title_and_no_text():
    page = read_page("<html><head><title> Gate &amp; weir\n shut </title></head><body>Text</body>")
    assert page == Page("Gate & weir shut", "Text")


def test_the_title_may_hold_what_looks_like_tags():
    assert read_page('<title>Use of <b> "here</title><p>Text').title == 'Use of <b> "here'


def test_a_heading_is_the_title_where_there_is_none_and_is_not_repeated():
    assert read_page("<title></title><h1>Gate <i>shut</i></h1><h1>More</h1>Text") == Page(
        "Gate shut", "More\nText"
    )


def test_a_heading_stays_text_where_there_is_a_title():
    assert read_page("<title>Gate</title><h1>Shut</h1>Text") == Page("Gate", "Shut\nText")


BOMBS = {
    "blocks": "<div>" * 100_000,
    "inline": "<b>" * 100_000,
    "tables": "<table><tr><td>" * 30_000,
    "lists": "<ul><li>" * 50_000,
    "attributes": "<a " + " ".join(f"a{n}=1" for n in range(200_000)) + ">",
    "formatting": "".join(f"<font size={n}>" for n in range(20_000)) + "<p>" * 20_000,
    "quotes": "<a \"'" * 100_000 + "\"'>",
    "equals": "<a " + "= " * 200_000 + ">",
    "spaces": "<a =" + " " * 500_000 + ">",
    "templates": "<template></template>" * 10_000 + "<template>" * 600 + "</template>" * 600,
    "crossed": "<span><p></span>" * 30_000,
    "buttons": "<p><button>" * 20_000,
}


@pytest.mark.parametrize("name", BOMBS)
def test_a_hostile_document_is_read_and_its_text_found(name):
    # Unguarded, the parser takes from minutes to hours, or all memory, for some of these.
    assert text(BOMBS[name] + "found") == "found"


def test_a_document_too_deep_for_a_tree_keeps_its_lines_and_title():
    deep = (
        "<title>Gate &amp; weir</title>" + "<div>" * 600 + "<script>no</script>one<br>two &lt;b&gt;"
    )
    assert is_heavy(simplified(deep))
    assert read_page(deep) == Page("Gate & weir", "one\ntwo <b>")


def test_what_follows_after_three_hundred_thousand_tags_is_not_read():
    kept = text("<i>a</i>" * 150_000 + "b<p>c")
    assert kept == "a" * 150_000 + "b"


def test_a_long_ordinary_page_is_not_taken_for_a_hostile_one():
    page = "<div><ul>" + "<li>one<p>two<div>three</div>" * 5000 + "</ul></div>"
    assert not is_heavy(simplified(page))


FRAGMENTS = [
    "<div>",
    "</div>",
    "<p>",
    "<b>",
    "</b>",
    "<br>",
    "<li>",
    "<td>",
    "<i>",
    "</p>",
    "a",
    " b",
]


@settings(deadline=None)
@given(st.lists(st.sampled_from(FRAGMENTS)).map("".join))
def test_both_ways_of_reading_find_the_same_words(document):
    deep = "<div>" * 600 + document
    assert text(deep).split() == text(document).split()


@settings(deadline=None)
@given(st.text(alphabet="<>/!-=\"' abpst&;#x0\n", max_size=200))
def test_any_markup_gives_a_page(document):
    page = read_page(document)
    assert "\n" not in page.title
    assert all(line == line.strip() for line in page.text.split("\n"))
