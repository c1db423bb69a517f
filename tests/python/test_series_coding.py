"""Compressed series, either way, with `curl --compressed`, zlib and the zstd of PyArrow as the other side."""

import gzip
import json
import signal
import socket
import subprocess
import zlib

import numpy as np
import pyarrow
import pytest

import series
from series import ARROW, CSV, FIELD, NDJSON, VELOCITY, curl, memory, problem
from test_series_stream import BOUND, LINE, ROW, WHERE, chunk, counts, everything, opened, row_by_row, until

CODINGS = ["gzip", "zstd"]


def unpacked(coding, packed):
    """The whole of what was packed (RFC 1952, RFC 8878), by a library that the service does not use."""
    if coding == "gzip":
        return gzip.decompress(packed)
    return pyarrow.input_stream(pyarrow.BufferReader(packed), compression="zstd").read()


def packed(service, where, kind, body, coding, accept=None):
    headers = {"Content-Type": kind, "Accept-Encoding": coding} | ({"Accept": accept} if accept else {})
    reply = service.request("POST", where, body, headers)
    assert reply.status == 200, reply.body
    assert reply.headers["content-encoding"] == coding
    assert "accept-encoding" in reply.headers["vary"]
    return reply.body


def test_a_compressed_body_is_unpacked_and_bounded(service):
    """gzip (RFC 1952): the same answer as plain; a bomb is one endless row, and what is no gzip says so."""
    headers = {"Content-Type": NDJSON, "Content-Encoding": "gzip"}
    idle = memory(service, "VmRSS")
    plain = service.request("POST", WHERE, LINE * 3, {"Content-Type": NDJSON})
    packed = service.request("POST", WHERE, gzip.compress(LINE * 3), headers)
    assert packed.status == 200 and packed.body == plain.body
    problem(service.request("POST", WHERE, gzip.compress(b" " * (1 << 28)), headers), 413, "row_too_long")
    problem(service.request("POST", WHERE, b"no gzip at all", headers), 400, "syntax")
    problem(service.request("POST", WHERE, LINE, headers | {"Content-Encoding": "br"}), 415, "unsupported_media_type")
    assert memory(service) < idle + BOUND


@pytest.mark.parametrize("coding", CODINGS)
@pytest.mark.parametrize("accept", [NDJSON, CSV, ARROW])
def test_a_packed_answer_is_the_plain_one(service, coding, accept):
    body = series.ndjson(series.questions(3000, "coding"))
    plain = series.send(service, WHERE, NDJSON, body, accept)
    assert "content-encoding" not in plain.headers
    answer = packed(service, WHERE, NDJSON, body, coding, accept)
    if accept == ARROW:
        # Rows of text are gathered into batches as they come.
        found, expected = (pyarrow.ipc.open_stream(body).read_all() for body in (unpacked(coding, answer), plain.body))
        assert found.equals(expected)
    else:
        assert unpacked(coding, answer) == plain.body
    # Doubles of all digits leave little to pack.
    assert len(answer) < (0.95 if accept == ARROW else 0.7) * len(plain.body)


@pytest.mark.parametrize("coding", CODINGS)
def test_each_row_is_answered_before_the_next_is_sent_also_when_packed(service, coding):
    """Every row is flushed: curl unpacks it from what has come so far."""
    row_by_row(service, service.ask(ROW), "--compressed", "-H", f"Accept-Encoding: {coding}")


@pytest.mark.parametrize("coding", CODINGS)
def test_an_archive_is_packed_in_bounded_memory(service, tmp_path, coding):
    """20 MB, in order; a slow reader of packed rows holds the service back like any other."""
    rows = tmp_path / "rows"
    with rows.open("wb") as out:
        for n in range(2):
            out.write(b"".join(series.ndjson([ROW | {"n": 100_000 * n + i}]) for i in range(100_000)))
    idle = memory(service, "VmRSS")
    options = ("--compressed", "-H", f"Accept-Encoding: {coding}", "-T", rows, "--limit-rate", "8M")
    client = curl(service, WHERE, NDJSON, *options, stdout=subprocess.PIPE)
    found = 0
    for line in client.stdout:
        if b'"end"' in line:
            break
        assert json.loads(line)["n"] == found
        found += 1
    assert counts(line)["answered"] == found == 200_000
    assert client.wait() == 0
    assert memory(service, "VmRSS") < idle + BOUND


@pytest.mark.parametrize("coding", CODINGS)
def test_a_packed_answer_that_is_cut_is_not_whole(service, coding, tmp_path):
    """gzip has no trailer (RFC 1952 §2.3.1), zstd no last block (RFC 8878 §3.1.1.2)."""
    with opened(service, f"{NDJSON}\r\nAccept-Encoding: {coding}") as plain:
        plain.sendall(chunk(LINE * 3 + LINE[:20]))
        begun = plain.recv(1 << 16)
        plain.shutdown(socket.SHUT_WR)
        answer = begun + everything(plain)
    head, _, body = answer.partition(b"\r\n\r\n")
    assert f"content-encoding: {coding}".encode() in head.lower()
    assert not body.endswith(b"0\r\n\r\n")
    pieces = b"".join(pieces_of(body))
    with pytest.raises((EOFError, OSError)):
        unpacked(coding, pieces)
    if coding == "gzip":
        stream = zlib.decompressobj(wbits=31)
        text = stream.decompress(pieces)
        assert not stream.eof and text.count(b'"velocity"') == 3 and b'"problem"' in text.splitlines()[-1]
    # And for a client that gives up.
    pipe = subprocess.PIPE
    options = ("-T", ".", "-o", tmp_path / "answer", "--compressed", "-H", f"Accept-Encoding: {coding}")
    client = curl(service, WHERE, NDJSON, *options, stdin=pipe)
    client.stdin.write(LINE)
    client.stdin.flush()
    until(lambda: (tmp_path / "answer").exists() and (tmp_path / "answer").stat().st_size > 0)
    client.send_signal(signal.SIGINT)
    assert client.wait(10) != 0


def pieces_of(body):
    """The pieces of a body in chunks, as far as they came (RFC 9112 §7.1)."""
    while body:
        size, _, body = body.partition(b"\r\n")
        size = int(size, 16)
        yield body[:size]
        body = body[size + 2:]


def test_an_answer_goes_plain_where_a_client_does_not_ask(service):
    """RFC 9110 §12.5.3: without the header any coding may be used; none is the safe one."""
    reply = series.send(service, WHERE, NDJSON, LINE)
    assert "content-encoding" not in reply.headers and reply.headers["vary"] == "accept, accept-encoding"
    refused = service.request("POST", WHERE, LINE, {"Content-Type": NDJSON, "Accept-Encoding": "br, *;q=0"})
    problem(refused, 406, "not_acceptable")


def arrow(table, compression, rows=None):
    out = pyarrow.BufferOutputStream()
    options = pyarrow.ipc.IpcWriteOptions(compression=compression)
    with pyarrow.ipc.new_stream(out, table.schema, options=options) as stream:
        stream.write_table(table, max_chunksize=rows)
    return out.getvalue().to_pybytes()


@pytest.mark.parametrize("compression", ["lz4", "zstd"])
def test_compressed_buffers_of_arrow_are_read(service, compression):
    """As PyArrow writes them by option; foreign columns, with dictionaries, nulls and nesting, pass."""
    count = 5000
    table = pyarrow.table(series.columns(series.questions(count, "buffers")) | {
        "station": pyarrow.array(["mast", None, "roof", "mast", ""] * (count // 5)).dictionary_encode(),
        "spectrum": pyarrow.array([[1.5, 2], [], None, [3], [4]] * (count // 5), pyarrow.list_(pyarrow.float32())),
    })
    plain, sent = arrow(table, None, 999), arrow(table, compression, 999)
    assert len(sent) < len(plain)
    for accept in (ARROW, CSV):
        expected = series.send(service, WHERE, ARROW, plain, accept)
        found = series.send(service, WHERE, ARROW, sent, accept)
        assert found.status == 200 and found.body == expected.body
    answer = pyarrow.ipc.open_stream(series.send(service, WHERE, ARROW, sent).body).read_all()
    assert answer["station"].to_pylist() == table["station"].to_pylist()
    assert answer["spectrum"].to_pylist() == table["spectrum"].to_pylist()


@pytest.mark.parametrize("compression", ["lz4", "zstd"])
def test_what_compressed_buffers_hold_is_bounded(service, compression):
    """Fourteen batches of 14 MB, each of some kilobytes when packed, are unpacked one after the other; a larger
    one is refused before that."""
    zeros = lambda rows: pyarrow.table({name: np.zeros(rows) for name in FIELD + VELOCITY})  # noqa: E731
    idle = memory(service, "VmRSS")
    many = arrow(pyarrow.concat_tables([zeros(200_000)] * 14), compression)
    assert len(many) < 10e6
    reply = series.send(service, WHERE + "&keep=vx", ARROW, many, CSV)
    assert reply.status == 200 and reply.body.count(b"\n") == 14 * 200_000 + 1
    assert memory(service) < idle + 2 * BOUND
    problem(series.send(service, WHERE, ARROW, arrow(zeros(300_000), compression)), 413, "batch_too_large")
