"""A series while it runs: `curl` as the client, slow and fast, and everything that can go wrong."""

import csv
import io
import json
import signal
import socket
import struct
import subprocess
import threading
import time

import pyarrow
import pytest

import series
from series import ARROW, CSV, FIELD, NDJSON, VELOCITY, curl, memory, problem

WHERE = series.path(velocity="row")
ROW = {"e": [1.0, -2.0, 3.0], "b": [4e-6, 5e-6, -6e-6], "velocity": [1e5, -2e5, 3e4]}
LINE = series.ndjson([ROW])
# What the service may hold above its idle state, whatever comes: the bound that is promised.
BOUND = 64


@pytest.fixture
def alone(service):
    return service.ask(ROW)


def counts(answer):
    """The last line of an NDJSON answer."""
    return json.loads(answer.splitlines()[-1])["end"]


def row_by_row(service, alone, *options):
    """Sends each row only once the last is answered: `curl -T .`, since with `-T -` curl itself
    waits for the next row before it shows the answer to the last."""
    pipe = subprocess.PIPE
    with curl(service, WHERE, NDJSON, "-T", ".", *options, stdin=pipe, stdout=pipe) as client:
        for n in range(20):
            client.stdin.write(series.ndjson([ROW | {"n": n}]))
            client.stdin.flush()
            answer = json.loads(client.stdout.readline())
            assert (answer["e"], answer["b"], answer["n"]) == (alone["e"], alone["b"], n)
        client.stdin.close()
        assert counts(client.stdout.read()) == {"read": 20, "answered": 20, "refused": 0}
    assert client.returncode == 0


def test_each_row_is_answered_before_the_next_is_sent(service, alone):
    """An instrument of a row now and then, in a pipe that stays open."""
    row_by_row(service, alone)


def test_a_row_of_a_table_too(service):
    pipe = subprocess.PIPE
    with curl(service, WHERE, CSV, "-T", ".", stdin=pipe, stdout=pipe) as client:
        client.stdin.write(",".join(FIELD + VELOCITY).encode() + b"\n")
        for n in range(5):
            client.stdin.write(b"0,0,0,0,0,1,%d,0,0\n" % (n * 1000))
            client.stdin.flush()
            if n == 0:
                assert client.stdout.readline().strip().endswith(b",problem")
            assert float(client.stdout.readline().split(b",")[1]) == pytest.approx(-1000.0 * n)
        client.stdin.close()
        assert client.stdout.read() == b""
    assert client.returncode == 0


def test_batches_of_arrow_too(service):
    """Each batch is answered before the next is sent."""
    pipe = subprocess.PIPE
    schema = pyarrow.schema([(name, pyarrow.float64()) for name in FIELD + VELOCITY])
    with curl(service, WHERE, ARROW, "-T", ".", stdin=pipe, stdout=pipe) as client:
        with pyarrow.ipc.new_stream(pyarrow.PythonFile(client.stdin), schema) as sent:
            reader = None
            for n in range(5):
                columns = [[0.0], [0.0], [0.0], [0.0], [0.0], [1.0], [n * 1000.0], [0.0], [0.0]]
                sent.write_batch(pyarrow.record_batch(columns, schema=schema))
                client.stdin.flush()
                reader = reader or pyarrow.ipc.open_stream(client.stdout)
                assert reader.read_next_batch()["ey"].to_pylist() == [pytest.approx(-1000.0 * n)]
        client.stdin.close()
        with pytest.raises(StopIteration):
            reader.read_next_batch()
    assert client.returncode == 0


def test_a_pipe_of_many_rows_is_answered_in_order(service, tmp_path):
    count = 100_000
    rows = tmp_path / "rows"
    rows.write_bytes(b"".join(series.ndjson([ROW | {"n": n}]) for n in range(count)))
    with rows.open("rb") as source:
        client = curl(service, WHERE, NDJSON, "-T", "-", stdin=source, stdout=subprocess.PIPE)
        lines = client.communicate()[0].splitlines()
    assert client.returncode == 0
    assert [json.loads(line)["n"] for line in lines[:-1]] == list(range(count))
    assert counts(lines[-1]) == {"read": count, "answered": count, "refused": 0}


def test_a_slow_reader_holds_the_service_back(service, tmp_path):
    """`--limit-rate` on 40 MB: all of it arrives in the end, and little of it waits in between."""
    rows = tmp_path / "rows"
    rows.write_bytes(LINE * 400_000)
    idle = memory(service, "VmRSS")
    slow = curl(service, WHERE, NDJSON, "-T", rows, "--limit-rate", "16M", stdout=subprocess.PIPE)
    answer = slow.communicate()[0]
    assert slow.returncode == 0
    assert counts(answer)["answered"] == 400_000
    assert memory(service, "VmRSS") < idle + BOUND


def test_ctrl_c_half_way_leaves_the_service_as_it_was(service, tmp_path):
    """No false whole answer for the client, and others are served as before."""
    answer = tmp_path / "answer"
    pipe = subprocess.PIPE
    client = curl(service, WHERE, NDJSON, "-T", ".", "-o", answer, stdin=pipe)
    for _ in range(100):
        client.stdin.write(LINE * 10)
        client.stdin.flush()
    until(lambda: answer.exists() and answer.stat().st_size > 0)
    client.send_signal(signal.SIGINT)
    assert client.wait(10) != 0
    assert b'"end"' not in answer.read_bytes()
    assert service.ask(ROW)
    until(lambda: b"lodeframe" in service.get("/metrics").body)


def until(true):
    """Waits for something that comes in its own time."""
    end = time.monotonic() + 10
    while not true():
        assert time.monotonic() < end, "it did not come"
        time.sleep(0.01)


def opened(service, kind, where=WHERE):
    """A connection on which a series was begun, its body in chunks."""
    plain = socket.create_connection((service.host, service.port), timeout=30)
    head = f"POST {where} HTTP/1.1\r\nHost: {service.host}\r\nContent-Type: {kind}\r\nTransfer-Encoding: chunked\r\n\r\n"
    plain.sendall(head.encode())
    return plain


def chunk(data):
    return b"%x\r\n%s\r\n" % (len(data), data)


def everything(plain):
    """What still comes on a connection, until it is closed."""
    found = b""
    try:
        while data := plain.recv(1 << 16):
            found += data
    except ConnectionResetError:
        pass
    return found


def test_a_cut_connection_gives_no_whole_answer(service):
    with opened(service, NDJSON) as plain:
        plain.sendall(chunk(LINE * 3 + LINE[:20]))
        # Half of a row came and no last chunk: the body is broken.
        plain.shutdown(socket.SHUT_WR)
        answer = everything(plain)
    assert answer.count(b'"velocity"') == 3
    assert b'"end"' not in answer and not answer.endswith(b"0\r\n\r\n")
    assert service.ask(ROW)


def test_a_reset_connection_frees_what_it_held(service):
    idle = memory(service, "VmRSS")
    for _ in range(50):
        with opened(service, NDJSON) as plain:
            plain.setsockopt(socket.SOL_SOCKET, socket.SO_LINGER, struct.pack("ii", 1, 0))
            plain.sendall(chunk(LINE * 1000))
    assert service.ask(ROW)
    assert memory(service, "VmRSS") < idle + BOUND


def test_a_row_of_twenty_megabytes_is_refused(service):
    """As the first row with a problem, later by a cut; the memory stays bounded."""
    idle = memory(service, "VmRSS")
    long = LINE[:-2] + b',"note":"' + b"x" * 20_000_000 + b'"}\n'
    problem(series.send(service, WHERE, NDJSON, long), 413, "row_too_long")
    with opened(service, NDJSON) as plain:
        plain.sendall(chunk(LINE))
        begun = plain.recv(1 << 16)
        assert begun.startswith(b"HTTP/1.1 200")
        try:
            plain.sendall(chunk(long))
        except (ConnectionResetError, BrokenPipeError):
            pass
        answer = begun + everything(plain)
    assert b"row_too_long" in answer and b'"end"' not in answer
    assert not answer.endswith(b"0\r\n\r\n")
    assert memory(service) < idle + BOUND


@pytest.mark.parametrize("kind, begins", [(NDJSON, LINE[:-2] + b',"note":"'), (CSV, b'ex,ey,ez,bx,by,bz,vx,vy,vz,note\n1,2,3,4,5,6,7,8,9,"')])
def test_a_row_that_never_ends_is_refused(service, kind, begins):
    idle = memory(service, "VmRSS")
    with opened(service, kind) as plain:
        try:
            plain.sendall(chunk(begins))
            for _ in range(1000):
                plain.sendall(chunk(b"x" * 65_536))
        except (ConnectionResetError, BrokenPipeError):
            pass
        answer = everything(plain)
    # What came after the refusal was thrown away, or the connection was closed under it.
    assert answer == b"" or answer.startswith(b"HTTP/1.1 413") and b"row_too_long" in answer
    assert memory(service) < idle + BOUND
    assert service.ask(ROW)


def test_a_header_without_a_component_is_refused_by_name(service):
    faults = problem(series.send(service, WHERE, CSV, b"ey,ez,bx,by,bz,vx,vy,vz\n1,2,3,4,5,6,7,8\n"), 400, "missing_field")
    assert [fault["column"] for fault in faults] == ["ex"]
    table = pyarrow.table({name: [1.0] for name in FIELD[1:] + VELOCITY})
    faults = problem(series.send(service, WHERE, ARROW, stream(table)), 400, "missing_field")
    assert [fault["column"] for fault in faults] == ["ex"]


def test_every_bad_row_says_why(service):
    """Also where one has several faults, and others follow it."""
    rows = [[1, 2, "x", 1, 2, 3, 4e8, 0, 0], [1, 2, 3, 1, 2, 3, 4e8, 0, 0], [1, 2, 3, 1, 2, 3, 4e7, 0, 0],
            [1, "1e999", 3, 1, 2, 3, 4e7, 0, 0], [1, 2, 3, 1, 2, 3, 0, 3e8, 0]]
    header = ",".join(FIELD + VELOCITY) + "\n"
    text = header + "".join(",".join(map(str, row)) + "\n" for row in rows)
    expected = ["wrong_type", "faster_than_light", "", "number_out_of_range", "faster_than_light"]
    reply = series.send(service, WHERE, CSV, text.encode())
    found = [row["problem"].split(" ")[0].strip(":") for row in csv.DictReader(io.StringIO(reply.body.decode()))]
    assert found == expected
    lines = [{"e": row[:3], "b": row[3:6], "velocity": row[6:]} for row in rows]
    lines = series.ndjson(lines).replace(b'"1e999"', b"1e999")
    *answers, end = map(json.loads, series.send(service, WHERE, NDJSON, lines).body.splitlines())
    codes = [row["problem"]["errors"][0]["code"] if "problem" in row else "" for row in answers]
    assert codes == expected
    assert end["end"] == {"read": 5, "answered": 1, "refused": 4}
    numbers = [[float("inf") if x == "1e999" else x for x in row] for row in rows[1:]]
    table = pyarrow.table(dict(zip(FIELD + VELOCITY, zip(*[map(float, row) for row in numbers]))))
    answer = pyarrow.ipc.open_stream(series.send(service, WHERE, ARROW, stream(table)).body).read_all()
    found = [(problem or "").split(":")[0].split(" ")[0] for problem in answer["problem"].to_pylist()]
    assert found == expected[1:]


def stream(table):
    sink = pyarrow.BufferOutputStream()
    with pyarrow.ipc.new_stream(sink, table.schema) as out:
        out.write_table(table)
    return sink.getvalue().to_pybytes()


def test_a_wrong_arrow_schema_is_refused_by_name(service):
    columns = {name: pyarrow.array([1.0]) for name in FIELD + VELOCITY}
    text = pyarrow.table(columns | {"ey": ["1.0"], "vz": [[1.0, 2.0]]})
    faults = problem(series.send(service, WHERE, ARROW, stream(text)), 400, "wrong_type")
    assert sorted(fault["column"] for fault in faults) == ["ey", "vz"]


@pytest.mark.parametrize("body", [b"not arrow at all", b"", b"\xff\xff\xff\xff\xff\xff\xff\x7f" + b"x" * 100])
def test_bytes_that_are_no_arrow_are_refused(service, body):
    reply = series.send(service, WHERE, ARROW, body)
    assert 400 <= reply.status < 500, reply.body
    assert reply.headers["content-type"] == "application/problem+json"


def test_a_cut_arrow_stream_gives_no_whole_answer(service):
    """Without its end-of-stream marker the stream may go on; nothing says that it ended."""
    body = stream(pyarrow.table({name: [1.0] * 3 for name in FIELD + VELOCITY}))
    with opened(service, ARROW) as plain:
        plain.sendall(chunk(body[:-8]) + b"0\r\n\r\n")
        answer = everything(plain)
    assert answer.startswith(b"HTTP/1.1 200")
    # Neither the marker at the end, nor the last chunk.
    assert b"\xff\xff\xff\xff\0\0\0\0\r\n" not in answer
    assert not answer.endswith(b"0\r\n\r\n")


def test_many_series_at_once_are_each_answered_whole(service, tmp_path):
    rows = tmp_path / "rows"
    rows.write_bytes(LINE * 20_000)
    found = []

    def one():
        client = curl(service, WHERE, NDJSON, "-T", rows, stdout=subprocess.PIPE)
        found.append(counts(client.communicate()[0])["answered"])

    threads = [threading.Thread(target=one) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert found == [20_000] * 8
