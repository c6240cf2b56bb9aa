"""Archives: which lines become items, and what is said of the others."""

import gzip
import json
import random
import tracemalloc
import zlib
from pathlib import Path

import pytest

from vanner.clock import parse_iso
from vanner.errors import InputError
from vanner.records import RawItem
from vanner.sources.archive import ArchiveFault, read_archive


def line(number: int, **keys) -> bytes:
    return json.dumps({"id": f"n{number}", "title": f"Title {number}", **keys}).encode() + b"\n"


def read(tmp_path: Path, data: bytes, name: str = "wire.jsonl", **options):
    path = tmp_path / name
    path.write_bytes(data)
    return list(read_archive(path, **options))


def guids(results) -> list[str]:
    return [result.guid for result in results if isinstance(result, RawItem)]


def sentences(results) -> list[str]:
    return [result.sentence for result in results if isinstance(result, ArchiveFault)]


def test_a_full_line_gives_all_its_fields(tmp_path):
    keys = {
        "date_published": "2024-05-03T10:00:00+02:00",
        "title": "Weir closed",
        "content_text": "The weir at Ostrau is closed.",
        "url": "https://wire.example/7",
        "language": "en",
        "source": "harbour wire",
        "colour": "ignored",
    }
    assert read(tmp_path, line(7, **keys)) == [
        RawItem(
            guid="n7",
            title="Weir closed",
            content_text="The weir at Ostrau is closed.",
            url="https://wire.example/7",
            language="en",
            date_raw="2024-05-03T10:00:00+02:00",
            published_s=parse_iso("2024-05-03T08:00:00Z"),
            source="harbour wire",
        )
    ]


def test_html_content_stays_html(tmp_path):
    (item,) = read(tmp_path, line(1, content_html="<p>Gate</p>"))
    assert (item.content_text, item.content_html) == (None, "<p>Gate</p>")


@pytest.mark.parametrize("name", ["wire.jsonl.gz", "wire.jsonl"])
def test_gzip_is_told_by_its_first_bytes(tmp_path, name):
    assert guids(read(tmp_path, gzip.compress(line(1) + line(2)), name)) == ["n1", "n2"]


def test_a_plain_file_named_gz_is_read_as_plain(tmp_path):
    assert guids(read(tmp_path, line(1), "wire.jsonl.gz")) == ["n1"]


def test_gzip_members_one_after_another_are_one_archive(tmp_path):
    data = gzip.compress(line(1)) + gzip.compress(line(2)) + b"\0" * 512
    results = read(tmp_path, data)
    assert (guids(results), sentences(results)) == (["n1", "n2"], [])


@pytest.mark.parametrize(
    ("bad", "reason"),
    [
        (b"{not json", "not JSON"),
        (b"[1, 2]", "no JSON object"),
        (b'"text"', "no JSON object"),
        (b'{"title": "x"}', 'no "id"'),
        (b'{"id": "", "title": "x"}', 'no "id"'),
        (b'{"id": null, "title": "x"}', 'no "id"'),
        (b'{"id": ["a"], "title": "x"}', 'an "id" of neither text nor number'),
        (b'{"id": true, "title": "x"}', 'an "id" of neither text nor number'),
        (b'{"id": NaN, "title": "x"}', 'an "id" of neither text nor number'),
        (b'{"id": 1e999, "title": "x"}', 'an "id" of neither text nor number'),
        (b'{"id": "a", "title": ["x"]}', '"title" is no text'),
        (b'{"id": "a", "content_text": 5}', '"content_text" is no text'),
        (b'{"id": "a", "content_html": {}}', '"content_html" is no text'),
        (b'{"id": "a", "title": "\xff\xfe"}', "not UTF-8"),
        (b"[" * 200_000, "nested too deeply"),
        (b'{"id": ' + b"9" * 5000 + b"}", "not JSON"),
    ],
)
def test_a_bad_line_is_told_and_its_neighbours_are_kept(tmp_path, bad, reason):
    results = read(tmp_path, line(1) + bad + b"\n" + line(3))
    assert guids(results) == ["n1", "n3"]
    assert sentences(results) == [f"wire.jsonl, line 2: {reason}; the line is left out."]


@pytest.mark.parametrize(
    ("number", "guid"), [("12", "12"), ("-3", "-3"), ("1.5", "1.5"), ("1e22", "1" + "0" * 22)]
)
def test_a_number_as_id_becomes_its_decimal_text(tmp_path, number, guid):
    assert guids(read(tmp_path, b'{"id": %s}' % number.encode())) == [guid]


@pytest.mark.parametrize(
    ("date", "date_raw"),
    [("yesterday", "yesterday"), ("", ""), (None, None), (17, "17"), (["x"], None), (True, None)],
)
def test_a_date_that_cannot_be_read_is_kept_as_found(tmp_path, date, date_raw):
    (item,) = read(tmp_path, line(1, date_published=date))
    assert (item.published_s, item.date_raw) == (None, date_raw)


def test_a_date_beyond_the_calendar_is_not_read(tmp_path):
    (item,) = read(tmp_path, line(1, date_published="0001-01-01T00:00:00+14:00"))
    assert item.published_s is None or item.published_s < -6e10


def test_a_missing_date_is_none(tmp_path):
    (item,) = read(tmp_path, line(1))
    assert (item.published_s, item.date_raw) == (None, None)


def test_a_title_of_null_is_empty(tmp_path):
    (item,) = read(tmp_path, line(1, title=None, content_text="Text"))
    assert item.title == ""


def test_addresses_languages_and_sources_of_another_type_are_dropped(tmp_path):
    (item,) = read(tmp_path, line(1, url=5, language=["en"], source={"a": 1}))
    assert (item.url, item.language, item.source) == (None, None, None)


def test_blank_lines_are_skipped_but_counted(tmp_path):
    results = read(tmp_path, b"\n  \r\n" + line(1) + b"\n{\n")
    assert guids(results) == ["n1"]
    assert sentences(results) == ["wire.jsonl, line 5: not JSON; the line is left out."]


def test_a_byte_order_mark_is_no_part_of_the_first_line(tmp_path):
    assert guids(read(tmp_path, b"\xef\xbb\xbf" + line(1))) == ["n1"]


def test_the_last_line_needs_no_line_feed(tmp_path):
    assert guids(read(tmp_path, line(1) + line(2).rstrip())) == ["n1", "n2"]


def test_windows_line_ends_are_taken(tmp_path):
    assert guids(read(tmp_path, line(1).replace(b"\n", b"\r\n") + line(2))) == ["n1", "n2"]


def test_an_empty_archive_gives_nothing(tmp_path):
    assert read(tmp_path, b"") == []


@pytest.mark.parametrize("pack", [bytes, gzip.compress])
def test_a_huge_line_is_left_out_in_bounded_memory(tmp_path, pack):
    huge = b'{"id": "huge", "content_text": "' + b"a" * 20_000_000 + b'"}\n'
    path = tmp_path / "wire.jsonl"
    path.write_bytes(pack(line(1) + huge + line(3)))
    del huge
    tracemalloc.start()
    results = list(read_archive(path))
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert guids(results) == ["n1", "n3"]
    assert sentences(results) == [
        "wire.jsonl, line 2: longer than 4194304 bytes; the line is left out."
    ]
    assert peak < 3 * 4 * 2**20


def test_a_line_of_just_the_limit_is_kept(tmp_path):
    whole = line(1).rstrip()
    assert guids(read(tmp_path, whole + b"\n", line_bytes=len(whole))) == ["n1"]
    assert guids(read(tmp_path, whole + b"\n", line_bytes=len(whole) - 1)) == []
    assert guids(read(tmp_path, whole, line_bytes=len(whole) - 1)) == []


def many(count: int) -> bytes:
    # Texts that gzip cannot shorten much, so that damage falls amid many lines.
    dice = random.Random(4)
    return b"".join(line(n, content_text=dice.randbytes(60).hex()) for n in range(1, count + 1))


def lines_before(data: bytes, packed: bytes, cut: int) -> list[str]:
    """What `zlib` gives for the bytes before the cut, one at a time."""
    member = zlib.decompressobj(wbits=31)
    plain = b"".join(member.decompress(packed[i : i + 1]) for i in range(cut))
    assert data.startswith(plain)
    return [f"n{n}" for n in range(1, plain.count(b"\n") + 1)]


@pytest.mark.parametrize("share", [0.0001, 0.3, 0.7, 0.999])
def test_truncated_gzip_gives_every_whole_line_and_one_fault(tmp_path, share):
    data = many(3000)
    packed = gzip.compress(data)
    cut = max(5, int(len(packed) * share))
    results = read(tmp_path, packed[:cut], "wire.jsonl.gz")
    expected = lines_before(data, packed, cut)
    assert guids(results) == expected
    assert sentences(results) == [
        f"wire.jsonl.gz, after line {len(expected)}: the gzip data end too early; the rest is lost."
    ]


def test_truncated_gzip_that_unpacks_a_thousandfold_gives_every_whole_line(tmp_path):
    data = line(1) * 3000
    packed = gzip.compress(data)
    # Each byte unpacks to some thousand, so these cuts pass over the end of an output.
    for cut in range(30, len(packed) - 10):
        plain = zlib.decompressobj(wbits=31).decompress(packed[:cut])
        assert len(guids(read(tmp_path, packed[:cut]))) == plain.count(b"\n")


def test_gzip_overwritten_amid_its_data_keeps_every_line_before(tmp_path):
    data = many(3000)
    packed = gzip.compress(data)
    cut = len(packed) // 2
    results = read(tmp_path, packed[:cut] + b"\xff" * (len(packed) - cut))
    expected = lines_before(data, packed, cut)
    assert len(expected) > 1000
    assert guids(results)[: len(expected)] == expected
    assert results[-1].ends_file


def test_damaged_gzip_gives_the_lines_before_the_damage_and_one_fault(tmp_path):
    first, second = gzip.compress(many(3000)), bytearray(gzip.compress(line(3001)))
    second[0] = 0
    second[1] = 7
    results = read(tmp_path, first + bytes(second), "wire.jsonl.gz")
    assert guids(results) == [f"n{n}" for n in range(1, 3001)]
    assert sentences(results) == [
        "wire.jsonl.gz, after line 3000: the gzip data are damaged; the rest is lost."
    ]


def test_a_wrong_gzip_checksum_is_one_fault_after_all_lines(tmp_path):
    packed = bytearray(gzip.compress(many(500)))
    packed[-6] ^= 255
    results = read(tmp_path, bytes(packed), "wire.jsonl.gz")
    assert guids(results) == [f"n{n}" for n in range(1, 501)]
    assert len(sentences(results)) == 1


def test_gzip_that_unpacks_a_thousandfold_loses_nothing(tmp_path):
    data = b"".join(line(n, content_text="a" * 100_000) for n in range(1, 31))
    assert guids(read(tmp_path, gzip.compress(data))) == [f"n{n}" for n in range(1, 31)]


@pytest.mark.parametrize("name", ["missing.jsonl", ".", "bad\0name"])
def test_an_archive_that_cannot_be_opened_is_an_input_error(tmp_path, name):
    with pytest.raises(InputError, match="cannot be opened"):
        list(read_archive(tmp_path / name))
