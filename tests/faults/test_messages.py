"""Messages that are not what they should be: refused, never misread, never a fault of the service.

RFC 9112 says which shapes of a message two readers could take for different requests; whatever
follows such a message on the same connection must not be answered (§6.3, §11.2).
"""

import json
import re
import socket

import pytest

from victim import Victim

QUESTION = b'{"e":[1,2,3],"b":[4,5,6],"velocity":[7,8,9]}'
HEAD = b"POST /v1/transform HTTP/1.1\r\nhost: x\r\ncontent-type: application/json\r\n"
PING = b"GET /health/live HTTP/1.1\r\nhost: x\r\n"
# What follows each message: answered only if the message before was understood to its end.
NEXT = PING + b"connection: close\r\n\r\n"


def length(value):
    return HEAD + b"content-length: " + value + b"\r\n\r\n" + QUESTION + NEXT


def coded(value, body=None):
    return HEAD + b"transfer-encoding: " + value + b"\r\n\r\n" + (chunk() if body is None else body) + NEXT


def chunk(size=b"%x" % len(QUESTION), end=b"\r\n", trailer=b""):
    return size + end + QUESTION + end + b"0" + end + trailer + end


def ping(head, end=b"\r\n\r\n"):
    return PING + head + end + NEXT


N = b"%d" % len(QUESTION)
BOTH = b"content-length: %s\r\ntransfer-encoding: chunked\r\n\r\n"

# Name → bytes, and the statuses of all answers before the connection ends.
MESSAGES = {
    "a sound message": (length(N), [200, 200]),
    "sound chunks": (coded(b"chunked"), [200, 200]),
    "chunk extensions": (coded(b"chunked", chunk(b"%x;a=b" % len(QUESTION))), [200, 200]),
    "a trailer": (coded(b"chunked", chunk(trailer=b"x: y\r\n")), [200, 200]),
    "line feeds alone": ((HEAD + b"content-length: " + N + b"\r\n\r\n").replace(b"\r\n", b"\n") + QUESTION + NEXT, [200, 200]),
    # §6.3: the length is ignored, and the connection closed after the answer.
    "length and chunks": (HEAD + BOTH % N + chunk() + NEXT, [200]),
    "short length and chunks": (HEAD + BOTH % b"4" + chunk() + NEXT, [200]),
    "the same length twice": (HEAD + (b"content-length: " + N + b"\r\n") * 2 + b"\r\n" + QUESTION + NEXT, [200, 200]),
    "two lengths": (HEAD + b"content-length: " + N + b"\r\ncontent-length: 5\r\n\r\n" + QUESTION + NEXT, [400]),
    "a list of lengths": (length(N + b", 5"), [400]),
    "a signed length": (length(b"+" + N), [400]),
    "a negative length": (length(b"-1"), [400]),
    "a length in hex": (length(b"0x2c"), [400]),
    "a length past 64 bits": (length(b"18446744073709551660"), [400]),
    "an unknown coding": (coded(b"xchunked"), [400]),
    "no coding": (coded(b"identity"), [400]),
    "chunked but not last": (coded(b"chunked, identity"), [400]),
    "chunked over gzip": (coded(b"gzip, chunked"), [400]),
    "chunked twice": (coded(b"chunked\r\ntransfer-encoding: chunked"), [400]),
    "a control character before the coding": (coded(b"\x0bchunked"), [400]),
    "chunks in HTTP/1.0": (coded(b"chunked").replace(b"1.1", b"1.0", 1), [400]),
    "a space before the colon": (HEAD + b"content-length : " + N + b"\r\n\r\n" + QUESTION + NEXT, [400]),
    "a space before the colon of the coding": (HEAD + b"transfer-encoding : chunked\r\n\r\n" + chunk() + NEXT, [400]),
    "a folded line": (ping(b"x: a\r\n content-length: 5"), [400]),
    "a carriage return alone": (ping(b"x: a\rcontent-length: 5"), [400]),
    "a NUL in a header": (ping(b"x: a\0b"), [400]),
    "two hosts": (ping(b"host: y"), [400]),
    "long chunk extensions": (coded(b"chunked", chunk(b"%x;%s" % (len(QUESTION), b"a" * 200_000))), [400]),
    "a chunk size with 0x": (coded(b"chunked", chunk(b"0x%x" % len(QUESTION))), [400]),
    "a negative chunk size": (coded(b"chunked", chunk(b"-1")), [400]),
    "a chunk size past 64 bits": (coded(b"chunked", chunk(b"f" * 17)), [400]),
    "a chunk longer than can come": (coded(b"chunked", chunk(b"7" + b"f" * 15)), [400]),
    "a chunk without its end": (coded(b"chunked", b"%x\r\n%s0\r\n\r\n" % (len(QUESTION), QUESTION)), [400]),
    "chunks ended by line feeds": (coded(b"chunked", chunk(end=b"\n")), [400]),
    "no chunk at all": (coded(b"chunked", b"xyz\r\n"), [400]),
    "a long trailer": (coded(b"chunked", chunk(trailer=b"x: " + b"y" * 100_000 + b"\r\n")), [400]),
    "HTTP/0.9": (b"GET /health/live\r\n" + NEXT, [400]),
    "HTTP/2 without saying so": (b"PRI * HTTP/2.0\r\n\r\nSM\r\n\r\n" + NEXT, []),
    "an upgrade nobody offered": (ping(b"connection: upgrade, http2-settings\r\nupgrade: h2c\r\nhttp2-settings: AAMAAABk"), [200, 200]),
    "a NUL in the method": (b"G\0T / HTTP/1.1\r\nhost: x\r\n\r\n" + NEXT, [400]),
    "a NUL in the path": (b"GET /\0 HTTP/1.1\r\nhost: x\r\n\r\n" + NEXT, [400]),
    "a tunnel": (b"CONNECT a:1 HTTP/1.1\r\nhost: a\r\n\r\n" + NEXT, [404, 200]),
    "a long path": (b"GET /" + b"a" * 10_000 + b" HTTP/1.1\r\nhost: x\r\n\r\n" + NEXT, [414, 200]),
    "an endless path": (b"GET /" + b"a" * 200_000, [431]),
    "many headers": (ping(b"a: b\r\n" * 200, b"\r\n"), [431]),
    "a long header": (ping(b"a: " + b"b" * 20_000), [431, 200]),
    "an endless header": (PING + b"a: " + b"b" * 500_000, [431]),
    "TLS to a plain port": (b"\x16\x03\x01\x02\x00\x01\x00\x01\xfc\x03\x03" + bytes(508), [400]),
    "every byte there is": (bytes(range(256)) * 10, [400]),
}


@pytest.fixture(scope="module")
def victim(tmp_path_factory):
    with Victim(tmp_path_factory.mktemp("messages") / "log.txt", bound=64) as running:
        yield running


def exchange(victim, data):
    """All that comes back until the service closes the connection."""
    with socket.create_connection((victim.host, victim.port), timeout=30) as plain:
        back = b""
        try:
            plain.sendall(data)
            if b"7fffffffffffffff" in data:
                plain.shutdown(socket.SHUT_WR)  # What was promised does not come.
            while part := plain.recv(1 << 16):
                back += part
        except ConnectionError:
            pass  # It refused before it had read everything.
    return back


@pytest.mark.parametrize("name", MESSAGES)
def test_a_message_is_answered_once_or_refused(victim, name):
    data, expected = MESSAGES[name]
    back = exchange(victim, data)
    assert [int(status) for status in re.findall(rb"HTTP/1\.[01] (\d{3})", back)] == expected, back[:2000]


def test_a_sound_message_arrives_the_same_in_any_pieces(victim):
    whole = exchange(victim, length(N))
    for size in (1, 7, 100):
        with socket.create_connection((victim.host, victim.port), timeout=30) as plain:
            plain.setsockopt(socket.IPPROTO_TCP, socket.TCP_NODELAY, 1)
            data = length(N)
            for start in range(0, len(data), size):
                plain.sendall(data[start:start + size])
            back = b""
            while part := plain.recv(1 << 16):
                back += part
        forget = re.compile(rb"(x-request-id|date): [^\r]*")
        assert forget.sub(b"", back) == forget.sub(b"", whole)


BODIES = {
    "nothing": b"",
    "invalid UTF-8": b'{"e":[1,2,3],"\xff\xfe":1}',
    "an overlong form of UTF-8": b'{"e":[1,2,3],"\xc0\xaf":1}',
    "half of a surrogate pair": b'{"e":[1,2,3],"\\ud800":1}',
    "UTF-16": json.dumps({"e": [1, 2, 3]}).encode("utf-16"),
    "a byte order mark": b'\xef\xbb\xbf{"e":[1,2,3]}',
    "a NUL at the end": QUESTION + b"\0",
    "two questions": QUESTION + QUESTION,
    "half a question": QUESTION[:-3],
    "NaN": b'{"e":[NaN,2,3],"velocity":[1,2,3]}',
    "Infinity": b'{"e":[Infinity,2,3],"velocity":[1,2,3]}',
    "1e999": b'{"e":[1e999,2,3],"b":[1,2,3],"velocity":[1,2,3]}',
    "-1e999": b'{"e":[1,2,3],"b":[1,2,3],"velocity":[-1e999,2,3]}',
    "an exponent of a million digits": b'{"e":[1e' + b"9" * 1_000_000 + b',2,3],"velocity":[1,2,3]}',
    "a repeated name": b'{"e":[1,2,3],"e":[1,2,3],"b":[4,5,6],"velocity":[7,8,9]}',
    "a repeated name, written otherwise": b'{"e":[1,2,3],"\\u0065":[1,2,3],"b":[4,5,6],"velocity":[7,8,9]}',
    "brackets without end": b"[" * 1_000_000,
    "deep lists": b"[" * 500_000 + b"]" * 500_000,
    "deep objects": b'{"a":' * 150_000 + b"1" + b"}" * 150_000,
    "a list of half a million": b'{"e":[' + b"1," * 500_000 + b'1],"velocity":[1,2,3]}',
    "half a million empty lists": b'{"e":[' + b"[]," * 300_000 + b'1],"velocity":[1,2,3]}',
    "a hundred thousand names": b"{" + b",".join(b'"n%d":1' % i for i in range(80_000)) + b"}",
    "one name a hundred thousand times": b"{" + b",".join([b'"e":1'] * 150_000) + b"}",
    "a long name": b'{"' + b"n" * 1_000_000 + b'":1}',
    "a long text": b'{"units":{"e":"' + b"V" * 1_000_000 + b'"}}',
    "too many steps": b'{"e":[1,2,3],"b":[1,2,3],"steps":[' + b",".join([b'{"boost":{"velocity":[1,2,3]}}'] * 30_000) + b"]}",
    "steps of many faults": b'{"e":[1,2,3],"steps":[' + b",".join([b"{}"] * 300_000) + b"]}",
    "too long": b" " * (1 << 20) + QUESTION,
}


@pytest.mark.parametrize("name", BODIES)
def test_a_body_that_is_no_question_is_explained(victim, name):
    reply = victim.post(BODIES[name])
    assert reply.status in (400, 413, 422), reply.body[:300]
    problem = reply.json
    assert problem["status"] == reply.status and problem["type"].startswith("/problems/")
    # A problem is read by people: no fault repeats a megabyte.
    assert len(reply.body) < 200_000, len(reply.body)


def test_digits_without_end_are_a_number_like_any_other(victim):
    digits = b'{"e":[0.%s1,2,3],"b":[4,5,6],"velocity":[7,8,9]}' % (b"0" * 900_000)
    exact = victim.post(b'{"e":[0,2,3],"b":[4,5,6],"velocity":[7,8,9]}')
    assert victim.post(digits).json == exact.json, "1e-900001 rounds to zero"


def test_compressed_bodies_are_refused_unread(victim):
    import gzip
    bomb = gzip.compress(b" " * 100_000_000 + QUESTION)
    headers = {"Content-Type": "application/json", "Content-Encoding": "gzip"}
    assert victim.request("POST", "/v1/transform", bomb, headers).status == 415
    assert victim.post(bomb).status == 400


QUERIES = ["e=%", "e=%zz", "e=%ff", "e=%00", "e=1,2,3&e=1,2,3", "e=NaN,1,2", "e=1e999,1,2", "e=" + "1," * 2000,
           "&" * 5000, "=" * 5000, "steps=" + "[" * 4000, "steps=[{%22boost%22", "e.x.y.z=1", "." * 4000, "a" + ".a" * 2000 + "=1"]


@pytest.mark.parametrize("query", QUERIES, ids=range(len(QUERIES)))
@pytest.mark.parametrize("path", ["/v1/transform", "/v1/sweep"])
def test_a_query_that_is_no_question_is_explained(victim, path, query):
    reply = victim.get(f"{path}?{query}")
    assert reply.status in (400, 422), reply.body[:300]
    assert reply.json["errors"] or reply.json["detail"]
    assert len(reply.body) < 200_000, len(reply.body)


def test_the_most_that_it_held(victim, figure):
    figure(f"{len(MESSAGES)} messages, {len(BODIES)} bodies and {2 * len(QUERIES)} queries out of shape: "
           f"at most {victim.peak:.0f} MiB held")
