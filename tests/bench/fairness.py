"""How long single readings wait beside heavy work, against how long they wait alone.

    PYTHONPATH=tests/python python3 tests/bench/fairness.py [SECONDS]

Starts the release binary and asks POST /v1/transform 100 times a second over four connections, first
alone, then while one client pours a long series and others ask for one Monte Carlo after the other.
Prints median and 99th percentile of the time from the moment a question was due to its answer. Client
and service share the cores, so the clients of the heavy work run at a lower priority.
"""

import http.client
import json
import multiprocessing
import os
import socket
import statistics
import sys
import tempfile
import threading
import time
from pathlib import Path

from service import Service

RATE, CONNECTIONS = 100, 4
QUESTION = json.dumps({"e": [0, 1.2, 0], "b": [0, 0, 45000], "velocity": [7.6, 0, 0],
                       "units": {"e": "mV/m", "b": "nT", "velocity": "km/s"}}).encode()
TRIALS = json.dumps({"e": [0, 1.2, 0], "b": [0, 0, 45000], "velocity": [7.6, 0, 0],
                     "units": {"e": "mV/m", "b": "nT", "velocity": "km/s"},
                     "uncertainty": {"e": [.1, .1, .1], "b": [5, 5, 5], "velocity": [.01, .01, .01]},
                     "monte_carlo": {"trials": 100_000}}).encode()
JSON = {"Content-Type": "application/json"}


def ask(port, first, seconds, waits):
    """Every CONNECTIONS-th question, each when it is due."""
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=60)
    begun = time.perf_counter()
    for n in range(first, int(RATE * seconds), CONNECTIONS):
        due = begun + n / RATE
        time.sleep(max(0, due - time.perf_counter()))
        connection.request("POST", "/v1/transform", QUESTION, JSON)
        answer = connection.getresponse()
        answer.read()
        assert answer.status == 200
        waits.append(time.perf_counter() - due)


def readings(port, seconds):
    """Median and 99th percentile of the waits, ms."""
    waits = []
    threads = [threading.Thread(target=ask, args=(port, n, seconds, waits)) for n in range(CONNECTIONS)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    waits.sort()
    return 1000 * statistics.median(waits), 1000 * waits[int(0.99 * len(waits))], len(waits)


def pour(port, done):
    """A series without an end, read while it is sent."""
    os.nice(10)
    rows = b"".join(b'{"time":%d,"e":[12.5,340.1,-3.75],"b":[1200.5,-450.25,44700.125]}\n' % n for n in range(1000))
    block = b"%x\r\n%s\r\n" % (len(rows), rows)
    stream = socket.create_connection(("127.0.0.1", port))

    def read():
        while part := stream.recv(1 << 18):
            done.value += part.count(b"\n")

    threading.Thread(target=read, daemon=True).start()
    stream.sendall(b"POST /v1/series?velocity=7.6,0,0 HTTP/1.1\r\nhost: x\r\n"
                   b"content-type: application/x-ndjson\r\ntransfer-encoding: chunked\r\n\r\n")
    while True:
        stream.sendall(block)


def draw(port, done):
    """One Monte Carlo after the other."""
    os.nice(10)
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=60)
    while True:
        connection.request("POST", "/v1/transform", TRIALS, JSON)
        answer = connection.getresponse()
        body = answer.read()
        assert answer.status == 200, body
        done.value += 1


def main(seconds):
    with tempfile.TemporaryDirectory() as folder, Service(Path(folder) / "log.txt", "--log", "off", "--grace", "1s") as service:
        readings(service.port, 2)
        alone = readings(service.port, seconds)
        rows, draws = multiprocessing.Value("q"), multiprocessing.Value("q")
        heavy = [multiprocessing.Process(target=pour, args=(service.port, rows), daemon=True),
                 multiprocessing.Process(target=draw, args=(service.port, draws), daemon=True)]
        for process in heavy:
            process.start()
        time.sleep(1)
        beside = readings(service.port, seconds)
        for process in heavy:
            process.kill()
            process.join()
    for name, (median, p99, count) in {"alone": alone, "beside": beside}.items():
        print(f"{name:8}{count:6} readings   median {median:7.3f} ms   p99 {p99:7.3f} ms")
    print(f"meanwhile {rows.value} rows and {draws.value} Monte Carlos of 100000 trials")
    bound = max(5 * alone[1], 5)
    print(f"p99 beside heavy work is {'within' if beside[1] <= bound else 'PAST'} its bound of {bound:.1f} ms")


if __name__ == "__main__":
    main(float(sys.argv[1]) if len(sys.argv) > 1 else 20)
