"""Clients that hold on without asking, or that break off: others are answered, and memory stays bounded."""

import random
import resource
import socket
import struct
import time

import pytest

from victim import ANSWER, Victim

HEAD = b"POST /v1/transform HTTP/1.1\r\nhost: x\r\ncontent-type: application/json\r\n"


@pytest.fixture(autouse=True)
def enough_files():
    """Sockets of this process; the service asks for its own by itself."""
    hard = resource.getrlimit(resource.RLIMIT_NOFILE)[1]
    resource.setrlimit(resource.RLIMIT_NOFILE, (hard, hard))


def connect(victim):
    return socket.create_connection((victim.host, victim.port), timeout=30)


def crowd(victim, count, first):
    """So many connections, on each of which something was sent."""
    held = []
    for _ in range(count):
        held.append(connect(victim))
        held[-1].sendall(first)
    return held


def leave(held):
    for one in held:
        one.close()


def settle(victim, name, value):
    """Waits for a metric to fall to a value."""
    end = time.monotonic() + 30
    while victim.gauge(name) > value:
        assert time.monotonic() < end, f"{name} is still {victim.gauge(name)}"
        time.sleep(0.05)


def test_idle_connections_cost_little(tmp_path, long, figure):
    count = 10_000 if long else 1000
    with Victim(tmp_path / "log.txt", "--max-connections", str(count + 10), bound=64 + count // 40) as victim:
        before = victim.peak
        # Half have asked once and stay; half never say anything.
        held = crowd(victim, count // 2, b"GET /health/live HTTP/1.1\r\nhost: x\r\n\r\n")
        for one in held:
            assert one.recv(1000).startswith(b"HTTP/1.1 200")
        held += crowd(victim, count // 2, b"")
        assert victim.ask(ANSWER)["e"] == ANSWER["e"]
        assert victim.gauge("connections") >= count
        figure(f"{count} idle connections: {(victim.peak - before) * 1024 / count:.1f} KiB each")
        leave(held)
        settle(victim, "connections", 2)


def test_idle_connections_and_slow_headers_are_closed(tmp_path):
    with Victim(tmp_path / "log.txt", "--idle-timeout", "1s", bound=64) as victim:
        silent, slow = connect(victim), connect(victim)
        slow.sendall(b"GET /health/live HTTP/1.1\r\n")
        begun = time.monotonic()
        # A header now and then does not keep it open.
        with pytest.raises(OSError):
            while time.monotonic() < begun + 30:
                slow.sendall(b"x: y\r\n")
                time.sleep(0.2)
        silent.settimeout(30)
        assert silent.recv(1) == b""
        leave([silent, slow])


def test_slow_headers_hold_no_more_than_their_share(tmp_path, long, figure):
    count = 2000 if long else 200
    # Each may fill the 64 KiB that a connection holds unread.
    with Victim(tmp_path / "log.txt", "--max-connections", str(count + 10), bound=64 + count * 0.08) as victim:
        held = crowd(victim, count, b"GET /health/live HTTP/1.1\r\nhost: x\r\nx: " + b"y" * 60_000)
        assert victim.ask(ANSWER)["e"] == ANSWER["e"]
        figure(f"{count} unfinished headers of 60 kB: {victim.peak:.0f} MiB held")
        leave(held)
        settle(victim, "connections", 2)


def test_slow_bodies_are_given_up_and_make_room(tmp_path, long, figure):
    count = 200 if long else 32
    flags = ["--max-concurrent", str(count), "--request-timeout", "2s"]
    with Victim(tmp_path / "log.txt", *flags, bound=64 + count * 1.5) as victim:
        held = crowd(victim, count, HEAD + b"content-length: 1000000\r\n\r\n" + b" " * 900_000)
        # As many run as may: the next is told to come again.
        shed = victim.until(503, "GET", "/health/live")
        assert shed.headers["retry-after"] == "1" and shed.json["type"] == "/problems/overloaded"
        answers = [one.recv(1000) for one in held]
        assert all(answer.startswith(b"HTTP/1.1 408") for answer in answers), answers[0]
        assert victim.ask(ANSWER)["e"] == ANSWER["e"]
        figure(f"{count} unfinished bodies of 900 kB: {victim.peak:.0f} MiB held, the next request shed, all given up after 2 s")
        leave(held)


def test_connections_that_break_off_leave_nothing_behind(tmp_path, long):
    rng = random.Random(1)
    body = b'{"e":[1,2,3],"b":[4,5,6],"velocity":[7,8,9]}'
    whole = HEAD + b"content-length: %d\r\n\r\n" % len(body) + body
    reset = struct.pack("ii", 1, 0)  # SO_LINGER with no time: close sends RST.
    with Victim(tmp_path / "log.txt", bound=64) as victim:
        for _ in range(5000 if long else 500):
            with connect(victim) as one:
                one.sendall(whole[:rng.randrange(len(whole) + 1)])
                how = rng.randrange(3)
                if how == 0:
                    one.setsockopt(socket.SOL_SOCKET, socket.SO_LINGER, reset)
                elif how == 1:
                    one.shutdown(socket.SHUT_WR)
        settle(victim, "connections", 2)
        assert victim.gauge("requests_in_flight") == 1, "the question for the metrics itself"


def test_more_connections_than_there_is_room_for(tmp_path, long, figure):
    count = 2000 if long else 300
    with Victim(tmp_path / "log.txt", "--max-connections", "100", bound=64) as victim:
        assert victim.ask(ANSWER)["e"] == ANSWER["e"]  # This connection stays.
        held = crowd(victim, count, b"")
        end = time.monotonic() + 30
        while (shed := victim.gauge("connections_shed_total")) < count - 99 and time.monotonic() < end:
            time.sleep(0.05)
        assert shed == count - 99
        figure(f"{count} connections where 100 are held: {shed:.0f} turned away, the one that asks is answered")
        leave(held)
        settle(victim, "connections", 2)
