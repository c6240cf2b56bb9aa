import gzip
import socket
import threading
import tracemalloc
import zlib

import httpx
import pytest

from vanner import __version__
from vanner.sources.feed.fetch import Credentials, FetchError, FetchLimits, Validators, fetch

MIB = 1024 * 1024


@pytest.fixture
def client():
    with httpx.Client(trust_env=False) as client:
        yield client


@pytest.fixture
def get(client):
    def get(url, **named):
        defaults = {"validators": None, "credentials": None, "limits": FetchLimits()}
        return fetch(client, url, **defaults | named)

    return get


@pytest.fixture
def raw_server():
    """A listener whose connections each go to the function that the test sets."""
    listener = socket.create_server(("127.0.0.1", 0))
    handlers, threads = [], []

    def serve():
        while True:
            try:
                connection, _ = listener.accept()
            except OSError:
                return
            with connection:
                try:
                    connection.recv(65536)
                    handlers[0](connection)
                except OSError:
                    continue

    def start(handler):
        handlers.append(handler)
        threads.append(threading.Thread(target=serve))
        threads[0].start()
        return f"http://127.0.0.1:{listener.getsockname()[1]}/"

    yield start
    listener.shutdown(socket.SHUT_RDWR)
    listener.close()
    for thread in threads:
        thread.join()


def test_an_answer_brings_status_headers_and_body(http_server, get):
    url = http_server.set("/f", b"<rss/>", headers={"Content-Type": "text/xml"})
    answer = get(url)
    assert (answer.status, answer.body, answer.url, answer.moved_to) == (200, b"<rss/>", url, None)
    assert answer.headers["content-type"] == "text/xml"


def test_requests_name_vanner_and_ask_only_for_what_can_be_decompressed(http_server, get):
    get(http_server.set("/f"))
    (request,) = http_server.requests
    assert request.headers["User-Agent"] == f"Vanner/{__version__}"
    assert request.headers["Accept-Encoding"] == "gzip, deflate"
    assert "If-None-Match" not in request.headers
    assert "Authorization" not in request.headers


def test_a_compressed_body_is_decompressed(http_server, get):
    url = http_server.set("/f", gzip.compress(b"<rss/>"), headers={"Content-Encoding": "gzip"})
    assert get(url).body == b"<rss/>"


def test_validators_go_to_the_address_that_gave_them_only(http_server, get):
    target = http_server.set("/new")
    old = http_server.set("/old", status=302, headers={"Location": "/new"})
    get(old, validators=Validators(target, etag='"1"', modified="Tue, 11 Mar 2031 08:00:00 GMT"))
    first, second = http_server.requests
    assert "If-None-Match" not in first.headers
    assert second.headers["If-None-Match"] == '"1"'
    assert second.headers["If-Modified-Since"] == "Tue, 11 Mar 2031 08:00:00 GMT"


@pytest.mark.parametrize("status", [302, 303, 307])
def test_a_temporary_redirect_is_followed_and_not_remembered(http_server, get, status):
    target = http_server.set("/new", b"x")
    answer = get(http_server.set("/old", status=status, headers={"Location": "/new"}))
    assert (answer.body, answer.url, answer.moved_to) == (b"x", target, None)


@pytest.mark.parametrize("status", [301, 308])
def test_a_permanent_redirect_is_followed_and_told(http_server, get, status):
    target = http_server.set("/new", b"x")
    answer = get(http_server.set("/old", status=status, headers={"Location": target}))
    assert (answer.body, answer.url, answer.moved_to) == (b"x", target, target)


def test_only_the_permanent_steps_before_the_first_temporary_one_are_told(http_server, get):
    http_server.set("/a", status=301, headers={"Location": "/b"})
    http_server.set("/b", status=302, headers={"Location": "/c"})
    http_server.set("/c", status=301, headers={"Location": "/d"})
    http_server.set("/d", b"x")
    answer = get(http_server.url("/a"))
    assert (answer.url, answer.moved_to) == (http_server.url("/d"), http_server.url("/b"))


def test_redirects_in_a_circle_end(http_server, get):
    http_server.set("/a", status=301, headers={"Location": "/b"})
    http_server.set("/b", status=302, headers={"Location": "/a"})
    with pytest.raises(FetchError, match="circle"):
        get(http_server.url("/a"))
    assert len(http_server.requests) == 2


def test_redirects_that_never_end_are_given_up(http_server, get):
    for number in range(20):
        http_server.set(f"/{number}", status=302, headers={"Location": f"/{number + 1}"})
    with pytest.raises(FetchError, match="more than 5 times"):
        get(http_server.url("/0"))
    assert len(http_server.requests) == 6


def test_five_redirects_are_followed(http_server, get):
    for number in range(5):
        http_server.set(f"/{number}", status=302, headers={"Location": f"/{number + 1}"})
    http_server.set("/5", b"x")
    assert get(http_server.url("/0")).body == b"x"


@pytest.mark.parametrize(
    "location",
    ["file:///etc/hostname", "ftp://wire.example/", "gopher:x", "https:///x", "http://[x"],
)
def test_a_redirect_to_anything_but_a_web_address_is_refused(http_server, get, location):
    url = http_server.set("/a", status=302, headers={"Location": location})
    with pytest.raises(FetchError, match=r"not http|cannot be used"):
        get(url)


def test_a_redirect_without_an_address_is_an_answer_like_any_other(http_server, get):
    assert get(http_server.set("/a", b"x", status=302)).status == 302


def test_a_password_is_sent_to_its_host(http_server, get):
    url = http_server.set("/f")
    get(url, credentials=Credentials(url, "desk", "salt"))
    assert http_server.requests[0].headers["Authorization"] == "Basic ZGVzazpzYWx0"


def test_a_password_does_not_follow_a_redirect_to_another_host(http_server, get):
    other = http_server.set("/new").replace("127.0.0.1", "localhost")
    url = http_server.set("/old", status=301, headers={"Location": other})
    get(url, credentials=Credentials(url, "desk", "salt"))
    assert "Authorization" in http_server.requests[0].headers
    assert "Authorization" not in http_server.requests[1].headers


@pytest.mark.parametrize("status", [204, 304, 404, 410, 500, 503])
def test_other_statuses_come_back_without_a_body(http_server, get, status):
    body = b"" if status in (204, 304) else b"an error page"
    answer = get(http_server.set("/f", body, status=status))
    assert (answer.status, answer.body) == (status, b"")


def test_a_body_over_the_limit_is_refused(http_server, get):
    url = http_server.set("/f", bytes(1001))
    with pytest.raises(FetchError, match="larger than"):
        get(url, limits=FetchLimits(body_bytes=1000))
    assert get(url, limits=FetchLimits(body_bytes=1001)).body == bytes(1001)


def test_a_gigabyte_of_gzip_costs_little_more_than_the_limit(http_server, get):
    deflater = zlib.compressobj(9, wbits=-zlib.MAX_WBITS)
    block = deflater.compress(bytes(16 * MIB)) + deflater.flush(zlib.Z_FULL_FLUSH)
    bomb = gzip.compress(b"")[:10] + block * 64
    url = http_server.set("/f", bomb, headers={"Content-Encoding": "gzip"})
    tracemalloc.start()
    try:
        with pytest.raises(FetchError, match="larger than 10 MiB"):
            get(url)
        peak = tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()
    assert peak < 24 * MIB


def test_a_body_that_never_ends_is_cut_at_its_size(http_server, get):
    def endless():
        while True:
            yield b"<rss>" * 10_000

    with pytest.raises(FetchError, match="larger than 10 MiB"):
        get(http_server.set("/f", endless))


LIMITS = FetchLimits(connect_s=5.0, read_s=5.0, total_s=0.3)


def test_a_body_that_drips_for_ever_is_cut_at_the_total_time(http_server, get):
    def drip():
        while not http_server.over.wait(0.01):
            yield b"<"

    with pytest.raises(FetchError, match=r"whole answer within 0\.3 s"):
        get(http_server.set("/f", drip), limits=LIMITS)


def test_a_head_that_drips_for_ever_is_cut_at_the_total_time(http_server, raw_server, get):
    def drip(connection):
        connection.sendall(b"HTTP/1.1 200 OK\r\nX-Slow: ")
        while not http_server.over.wait(0.01):
            connection.sendall(b"a")

    with pytest.raises(FetchError, match="whole answer within"):
        get(raw_server(drip), limits=LIMITS)


def test_the_total_time_spans_redirects(http_server, get):
    http_server.set("/0", status=302, headers={"Location": "/1"})

    def wait():
        http_server.over.wait()
        return []

    http_server.set("/1", wait)
    with pytest.raises(FetchError, match="whole answer within"):
        get(http_server.url("/0"), limits=LIMITS)


def test_silence_is_cut_at_the_read_timeout(http_server, get):
    def silent():
        http_server.over.wait()
        return []

    with pytest.raises(FetchError, match=r"sent nothing for 0\.1 s"):
        get(http_server.set("/f", silent), limits=FetchLimits(read_s=0.1, total_s=30))


def test_a_closed_port_is_told(get):
    with socket.create_server(("127.0.0.1", 0)) as listener:
        port = listener.getsockname()[1]
    with pytest.raises(FetchError, match="no connection can be made"):
        get(f"http://127.0.0.1:{port}/")


def test_a_body_shorter_than_announced_is_no_body(raw_server, get):
    url = raw_server(lambda c: c.sendall(b"HTTP/1.1 200 OK\r\nContent-Length: 99\r\n\r\n<rss/>"))
    with pytest.raises(FetchError, match="broke off"):
        get(url)


def test_what_is_no_http_is_told(raw_server, get):
    with pytest.raises(FetchError, match="no HTTP"):
        get(raw_server(lambda c: c.sendall(b"220 mail.example ready\r\n")))


@pytest.mark.parametrize("url", ["ftp://wire.example/f", "file:///etc/hostname", "http://", "x"])
def test_only_http_and_https_are_asked(get, url):
    with pytest.raises(FetchError, match="cannot be used"):
        get(url)
