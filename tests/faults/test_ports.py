"""What another machine finds of the service: a scan of every TCP port from another network namespace."""

import http.client
import os
import socket
import subprocess
import time

import pytest

from service import BINARY

# RFC 5737 §3: addresses for documentation, which lead nowhere else.
SERVER, CLIENT = "192.0.2.1", "192.0.2.2"

SCAN = """
import select, socket, sys
found, poll = [], select.poll()
for first in range(1, 65536, 500):
    waiting = {}
    for port in range(first, min(first + 500, 65536)):
        one = socket.socket()
        one.setblocking(False)
        if one.connect_ex((sys.argv[1], port)) == 0:
            found.append(port)
        waiting[one.fileno()] = (one, port)
        poll.register(one, select.POLLOUT)
    while waiting:
        events = poll.poll(5000)
        assert events, "the scanned machine drops packets"
        for number, event in events:
            one, port = waiting.pop(number)
            poll.unregister(number)
            if one.getsockopt(socket.SOL_SOCKET, socket.SO_ERROR) == 0:
                found.append(port)
            one.close()
print(*sorted(set(found)))
"""


def run(*command):
    return subprocess.run(command, check=True, capture_output=True, text=True).stdout


@pytest.fixture
def networks():
    """Two network namespaces joined by a cable: the server's and the client's."""
    server, client = (f"lodeframe-{name}-{os.getpid()}" for name in ("server", "client"))
    try:
        for name in (server, client):
            run("ip", "netns", "add", name)
            run("ip", "-n", name, "link", "set", "lo", "up")
        run("ip", "-n", server, "link", "add", "cable", "type", "veth", "peer", "name", "cable", "netns", client)
        for name, address in ((server, SERVER), (client, CLIENT)):
            run("ip", "-n", name, "address", "add", f"{address}/30", "dev", "cable")
            run("ip", "-n", name, "link", "set", "cable", "up")
        yield server, client
    finally:
        for name in (server, client):
            subprocess.run(["ip", "netns", "delete", name], check=False)


def scan(networks, *flags):
    """The ports that the client finds while the service runs with these flags."""
    server, client = networks
    process = subprocess.Popen(["ip", "netns", "exec", server, BINARY, "serve", *flags], stdout=subprocess.PIPE)
    try:
        assert b"listens on" in process.stdout.readline()
        ports = run("ip", "netns", "exec", client, "python3", "-c", SCAN, SERVER)
        # The same from inside: no other socket waits for anyone, UDP and raw ones included.
        inside = run("ip", "netns", "exec", server, "ss", "--no-header", "--numeric", "--listening", "--tcp", "--udp", "--raw")
    finally:
        process.terminate()
        assert process.wait(10) == 0
    return [int(port) for port in ports.split()], [line.split()[4] for line in inside.splitlines()]


def test_by_default_nothing_is_found(networks):
    assert scan(networks) == ([], ["127.0.0.1:7410"])


def test_only_what_was_configured_is_found(networks, tmp_path, figure):
    tokens = tmp_path / "tokens"
    tokens.write_text(run(BINARY, "token", "scanner"))
    begun = time.monotonic()
    assert scan(networks, "--listen", f"{SERVER}:8443", "--tokens", tokens) == ([8443], [f"{SERVER}:8443"])
    figure(f"65535 ports scanned from another network namespace in {time.monotonic() - begun:.1f} s: only the configured one is open")


def test_a_socket_passed_on_is_all_the_network_it_needs():
    """As the systemd unit runs it: PrivateNetwork=yes, and one socket from outside."""
    with socket.create_server(("127.0.0.1", 0)) as listening:
        port = listening.getsockname()[1]
        script = 'exec 3<&0 0</dev/null; LISTEN_PID=$$ LISTEN_FDS=1 exec "$0" serve'
        process = subprocess.Popen(["unshare", "--net", "sh", "-c", script, BINARY], stdin=listening, stdout=subprocess.PIPE)
        try:
            assert f"http://127.0.0.1:{port}".encode() in process.stdout.readline()
            connection = http.client.HTTPConnection("127.0.0.1", port, timeout=30)
            connection.request("GET", "/health/ready")
            assert connection.getresponse().status == 200
            connection.close()
        finally:
            process.terminate()
            assert process.wait(10) == 0
