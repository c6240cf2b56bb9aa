import gzip
import tracemalloc
import zlib

import pytest

from vanner.sources.feed.body import BodyError, bounded_body

LIMIT = 1024 * 1024
TEXT = b"<rss>Nebel im Hafen von Ostrau</rss>" * 50


def pieces(data, size):
    return [data[at : at + size] for at in range(0, len(data), size)]


def raw_deflate(data):
    deflater = zlib.compressobj(wbits=-zlib.MAX_WBITS)
    return deflater.compress(data) + deflater.flush()


def gigabyte_of_gzip():
    """The start of a gzip stream that expands to 1 GiB, without the work of compressing it.

    A block that ends in a full flush refers to nothing before it, so it can be repeated.
    """
    deflater = zlib.compressobj(9, wbits=-zlib.MAX_WBITS)
    block = deflater.compress(bytes(16 * 1024**2)) + deflater.flush(zlib.Z_FULL_FLUSH)
    return gzip.compress(b"")[:10] + block * 64


@pytest.mark.parametrize("size", [1, 7, 10_000])
@pytest.mark.parametrize(
    ("encoding", "compress"),
    [
        ("", bytes),
        ("identity", bytes),
        ("gzip", gzip.compress),
        ("X-GZIP", gzip.compress),
        ("deflate", zlib.compress),
        ("deflate", raw_deflate),
    ],
)
def test_a_body_comes_back_whole_however_it_is_cut_into_chunks(encoding, compress, size):
    assert bounded_body(pieces(compress(TEXT), size), encoding, LIMIT) == TEXT


def test_gzip_members_one_after_another_are_one_body():
    assert bounded_body([gzip.compress(b"one ") + gzip.compress(b"two")], "gzip", LIMIT) == (
        b"one two"
    )


def test_padding_after_gzip_means_nothing():
    assert bounded_body([gzip.compress(b"one"), b"\0\0\0"], "gzip", LIMIT) == b"one"


def test_a_body_of_exactly_the_limit_is_taken():
    assert bounded_body([bytes(LIMIT)], "", LIMIT) == bytes(LIMIT)
    assert bounded_body([gzip.compress(bytes(LIMIT))], "gzip", LIMIT) == bytes(LIMIT)


@pytest.mark.parametrize(("encoding", "compress"), [("", bytes), ("gzip", gzip.compress)])
def test_one_byte_over_the_limit_is_refused(encoding, compress):
    with pytest.raises(BodyError, match="larger than 1 MiB"):
        bounded_body([compress(bytes(LIMIT + 1))], encoding, LIMIT)


def test_a_gigabyte_of_gzip_in_one_chunk_costs_little_more_than_the_limit():
    bomb = gigabyte_of_gzip()
    assert len(bomb) < 2 * LIMIT
    tracemalloc.start()
    try:
        with pytest.raises(BodyError, match="larger than 10 MiB"):
            bounded_body([bomb], "gzip", 10 * LIMIT)
        peak = tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()
    assert peak < 16 * LIMIT


def test_the_bomb_of_these_tests_does_expand_to_a_gigabyte():
    inflater, size = zlib.decompressobj(zlib.MAX_WBITS | 32), 0
    for piece in pieces(gigabyte_of_gzip(), 16 * 1024):
        size += len(inflater.decompress(piece))
    assert size == 1024**3


def test_compressed_data_that_ends_too_early_is_refused():
    with pytest.raises(BodyError, match="too early"):
        bounded_body([gzip.compress(TEXT)[:-12]], "gzip", LIMIT)


@pytest.mark.parametrize("encoding", ["gzip", "deflate"])
def test_damaged_data_is_refused(encoding):
    with pytest.raises(BodyError, match="damaged"):
        bounded_body([b"\xff\xff plainly not compressed"], encoding, LIMIT)


@pytest.mark.parametrize("encoding", ["br", "zstd", "gzip, gzip"])
def test_an_encoding_that_was_not_asked_for_is_refused(encoding):
    with pytest.raises(BodyError, match="content encoding"):
        bounded_body([TEXT], encoding, LIMIT)


@pytest.mark.parametrize("encoding", ["", "gzip", "deflate"])
def test_no_body_is_an_empty_body(encoding):
    assert bounded_body([], encoding, LIMIT) == b""
