"""Series whose clients do not read, do not send, break off, or lose their replica."""

import socket
import threading
import time

from cluster import Cluster
from victim import ANSWER, Victim

HEAD = (b"POST /v1/series?velocity=7,8,9 HTTP/1.1\r\nhost: x\r\n"
        b"content-type: application/x-ndjson\r\ntransfer-encoding: chunked\r\n\r\n")
ROW = b'{"e":[1,2,3],"b":[4,5,6]}\n'
LAST = b"\r\n0\r\n\r\n"


def chunk(data):
    return b"%x\r\n%s\r\n" % (len(data), data)


def begin(service, rows=1):
    """A series of which some rows were sent, and the first answer received."""
    stream = socket.create_connection((service.host, service.port), timeout=30)
    stream.sendall(HEAD + chunk(ROW * rows))
    back = b""
    while b"}\n" not in back:
        back += stream.recv(1 << 16)
    assert back.startswith(b"HTTP/1.1 200")
    return stream, back


def rest(stream):
    """What still comes until the connection ends."""
    back = b""
    try:
        while part := stream.recv(1 << 16):
            back += part
    except ConnectionError:
        pass
    return back


def test_clients_that_never_read_hold_no_more_than_their_share(tmp_path, long, figure):
    count = 200 if long else 20
    # Unread answer 1 MiB; blocks under way, and what the connection reads ahead, a MiB more.
    with Victim(tmp_path / "log.txt", "--idle-timeout", "4s", bound=96 + count * 2.5) as victim:
        streams, stop = [], threading.Event()
        block = chunk(ROW * 2000)

        def pour(stream):
            stream.sendall(HEAD)
            try:
                while not stop.is_set():
                    stream.sendall(block)
            except OSError:
                return  # Closed by the service, as it says.

        for _ in range(count):
            stream = socket.create_connection((victim.host, victim.port), timeout=60)
            stream.setsockopt(socket.SOL_SOCKET, socket.SO_RCVBUF, 4096)
            streams.append((stream, threading.Thread(target=pour, args=[stream])))
        for _, thread in streams:
            thread.start()
        for _ in range(20):
            assert victim.ask(ANSWER)["e"] == ANSWER["e"], "others are answered"
            time.sleep(0.05)
        # None of them reads, so each is closed after the idle time.
        for _, thread in streams:
            thread.join(60)
            assert not thread.is_alive()
        stop.set()
        for stream, _ in streams:
            stream.close()
        figure(f"{count} series that nobody reads: {victim.peak:.0f} MiB held, all closed after the idle time")


def test_a_series_may_pause_longer_than_a_request_may_take(tmp_path):
    with Victim(tmp_path / "log.txt", "--request-timeout", "200ms", "--idle-timeout", "5s", bound=64) as victim:
        stream, _ = begin(victim)
        time.sleep(1)
        stream.sendall(chunk(ROW) + b"0\r\n\r\n")
        back = rest_of_whole(stream)
        assert b'"answered":2' in back and back.endswith(LAST)
        # Also before its first row.
        late = socket.create_connection((victim.host, victim.port), timeout=30)
        late.sendall(HEAD)
        time.sleep(1)
        late.sendall(chunk(ROW) + b"0\r\n\r\n")
        assert b'"answered":1' in rest_of_whole(late)


def rest_of_whole(stream):
    back = b""
    while not back.endswith(LAST):
        part = stream.recv(1 << 16)
        assert part, back
        back += part
    stream.close()
    return back


def test_a_series_without_rows_is_closed_after_the_idle_time(tmp_path):
    with Victim(tmp_path / "log.txt", "--idle-timeout", "500ms", bound=64) as victim:
        stream, _ = begin(victim)
        back = rest(stream)
        assert b"/problems/request_timeout" in back and LAST not in back


def test_a_series_that_breaks_off_is_never_taken_for_whole(tmp_path):
    with Victim(tmp_path / "log.txt", bound=64) as victim:
        for rubbish in (b"xyz\r\n", b"-5\r\n", b"ffffffffffffffffff\r\n", b"5\r\nabcdeXX"):
            stream, _ = begin(victim)
            stream.sendall(rubbish)
            back = rest(stream)
            assert LAST not in back and b'"end"' not in back, back
            stream.close()
        half, _ = begin(victim)
        half.shutdown(socket.SHUT_WR)
        back = rest(half)
        assert LAST not in back and b'"end"' not in back, back
        end = time.monotonic() + 30
        while victim.gauge("requests_in_flight") > 1:
            assert time.monotonic() < end, "a series still runs for nobody"
            time.sleep(0.05)


def test_rows_pass_the_proxy_while_the_series_goes_on(tmp_path):
    with Cluster(tmp_path) as cluster:
        plain = socket.create_connection(("127.0.0.1", cluster.port), timeout=30)
        stream = cluster.trust().wrap_socket(plain, server_hostname="127.0.0.1")
        stream.sendall(HEAD + chunk(ROW))
        back = b""
        for row in range(2, 5):
            while back.count(b"}\n") < row - 1:
                part = stream.recv(1 << 16)
                assert part, back
                back += part
            stream.sendall(chunk(ROW))
        stream.sendall(b"0\r\n\r\n")
        assert b'"answered":4' in rest_of_whole(stream)


def test_a_series_whose_replica_dies_is_cut(tmp_path):
    with Cluster(tmp_path) as cluster:
        plain = socket.create_connection(("127.0.0.1", cluster.port), timeout=30)
        stream = cluster.trust().wrap_socket(plain, server_hostname="127.0.0.1")
        stream.sendall(HEAD + chunk(ROW))
        back = b""
        while b"}\n" not in back:
            back += stream.recv(1 << 16)
        for i in range(len(cluster.replicas)):
            cluster.kill(i)
        back = rest(stream)
        assert LAST not in back and b'"end"' not in back, "a cut answer must not look whole"
