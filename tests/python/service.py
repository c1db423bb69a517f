"""The service under test as its users see it: a process, an address, and HTTP over kept connections."""

import http.client
import json
import os
import re
import signal
import socket
import subprocess
import threading
import time
import urllib.parse
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
TARGET = Path(os.environ.get("CARGO_TARGET_DIR", ROOT / "target"))
BINARY = TARGET / "release" / "lodeframe"

JSON = {"Content-Type": "application/json"}


@dataclass
class Reply:
    """One HTTP answer. Header names are in lower case."""

    status: int
    headers: dict
    body: bytes

    @property
    def json(self):
        return json.loads(self.body)


class Service:
    """A release binary started with `flags` on a port of the loopback address, by default a free one."""

    def __init__(self, log, *flags, port=0):
        self.log = log
        self.process = subprocess.Popen(
            [BINARY, "serve", "--listen", f"127.0.0.1:{port}", *flags],
            stdin=subprocess.DEVNULL, stdout=log.open("wb"), stderr=subprocess.STDOUT,
        )
        self.host, self.port = "127.0.0.1", self._announced_port()
        self._kept = threading.local()

    def __enter__(self):
        return self

    def __exit__(self, *_):
        assert self.stop() == 0, "SIGTERM must end the service with exit code 0"

    @property
    def url(self):
        return f"http://{self.host}:{self.port}"

    def _announced_port(self):
        """The port in the address that the service prints at its start."""
        end = time.monotonic() + 10
        while time.monotonic() < end and self.process.poll() is None:
            found = re.search(rb"https?://127\.0\.0\.1:(\d+)", self.log.read_bytes())
            if found:
                return int(found[1])
            time.sleep(0.01)
        self.process.kill()
        raise AssertionError(f"the service did not start; it printed:\n{self.log.read_text()}")

    def stop(self):
        """Asks the service to end and returns its exit code."""
        self.process.send_signal(signal.SIGTERM)
        try:
            return self.process.wait(10)
        except subprocess.TimeoutExpired:
            self.process.kill()
            raise

    def request(self, method, path, body=None, headers=None):
        """One request on this thread's kept connection, which is opened anew once it was closed."""
        kept = getattr(self._kept, "connection", None)
        for connection in filter(None, (kept, http.client.HTTPConnection(self.host, self.port, timeout=30))):
            self._kept.connection = None
            try:
                connection.request(method, path, body, headers or {})
                answer = connection.getresponse()
                body_back = answer.read()
            except (http.client.RemoteDisconnected, ConnectionResetError, BrokenPipeError):
                if connection is not kept:
                    raise
                continue
            self._kept.connection = None if answer.will_close else connection
            names = {name.lower(): value for name, value in answer.getheaders()}
            return Reply(answer.status, names, body_back)
        raise AssertionError("unreachable: the new connection answers or raises")

    def get(self, path, **headers):
        names = {name.replace("_", "-"): value for name, value in headers.items()}
        return self.request("GET", path, headers=names)

    def post(self, question, path="/v1/transform"):
        """A question (a dict, or bytes sent as they are) as a JSON body."""
        body = question if isinstance(question, bytes) else json.dumps(question).encode()
        return self.request("POST", path, body, JSON)

    def ask(self, question):
        """The answer to a question that has one."""
        reply = self.post(question)
        assert reply.status == 200, f"{question}\n{reply.status} {reply.body.decode()}"
        return reply.json

    def post_all(self, questions):
        """Replies to many questions, in order, over a few connections at once."""
        with ThreadPoolExecutor(4) as pool:
            return list(pool.map(self.post, questions))

    def until(self, status, method, path):
        """The first reply of this status, asked for again and again for up to ten seconds."""
        end = time.monotonic() + 10
        while time.monotonic() < end:
            reply = self.request(method, path)
            if reply.status == status:
                return reply
        raise AssertionError(f"no reply of status {status}; the last was {reply}")

    def raw(self, data):
        """Bytes sent as they are; the reply to them."""
        with socket.create_connection((self.host, self.port), timeout=30) as plain:
            plain.sendall(data)
            answer = http.client.HTTPResponse(plain)
            answer.begin()
            body = answer.read()
        return Reply(answer.status, {n.lower(): v for n, v in answer.getheaders()}, body)


def by_url(question, path="/v1/transform"):
    """The path and query that ask a question: a parameter is a path joined by dots."""
    pairs = []

    def walk(path, value):
        if isinstance(value, dict):
            for name, member in value.items():
                walk([*path, name], member)
        elif isinstance(value, list) and not any(isinstance(item, (dict, list)) for item in value):
            pairs.append((".".join(path), ",".join(_word(item) for item in value)))
        elif isinstance(value, list):
            pairs.append((".".join(path), json.dumps(value)))
        else:
            pairs.append((".".join(path), _word(value)))

    walk([], question)
    return f"{path}?" + urllib.parse.urlencode(pairs, safe=",[]{}:", quote_via=urllib.parse.quote)


def _word(value):
    return value if isinstance(value, str) else json.dumps(value)
