"""Rows per second of a series, every figure measured in one run with its ratio beside it.

Started by `tests/bench/series`. Ours are exact to the last digit, the peers compute in plain
doubles. Files lie in memory (/dev/shm), so that no disk counts.
"""

import argparse
import re
import signal
import subprocess
import sys
import tempfile
import time
from functools import partial
from pathlib import Path

import rows
from peers import PEERS

HERE = Path(__file__).parent
QUERY = "velocity=row"
MEDIA = {
    "ndjson": "application/x-ndjson",
    "csv": "text/csv",
    "arrow": "application/vnd.apache.arrow.stream",
}
TURNS = 5


def best(runs):
    """The shortest seconds of each run, taken in turns: a slow moment of the machine meets all."""
    turns = [{name: run() for name, run in runs.items()} for _ in range(TURNS)]
    return {name: min(turn[name] for turn in turns) for name in runs}


def in_process(binary, kind, threads, source, answer=None):
    """Seconds of the library alone; an answer of before is gone before the clock starts."""
    if answer:
        answer.unlink(missing_ok=True)
    command = [binary, kind, kind, str(threads), QUERY, source, *filter(None, [answer])]
    out = subprocess.run(command, check=True, capture_output=True, text=True).stdout
    return float(out.split()[1])


def kernel(binary, count):
    """Seconds of the transformation alone, from columns to columns, on one thread."""
    count = -(-count // 1000) * 1000
    out = subprocess.run([binary, "kernel", str(count)], check=True, capture_output=True, text=True).stdout
    return float(out.split()[1])


def peer(name, source, answer):
    """Seconds of a script in Python."""
    answer.unlink(missing_ok=True)
    command = [sys.executable, HERE / "peers.py", name, source, answer]
    return float(subprocess.run(command, check=True, capture_output=True, text=True).stdout)


class Service:
    """The release binary on a free port."""

    def __init__(self, binary, log):
        self.process = subprocess.Popen(
            [binary, "serve", "--listen", "127.0.0.1:0"], stdout=log.open("wb"), stderr=subprocess.STDOUT
        )
        while not (found := re.search(rb"http://127\.0\.0\.1:\d+", log.read_bytes())):
            assert self.process.poll() is None, log.read_text()
            time.sleep(0.01)
        self.url = f"{found[0].decode()}/v1/series?{QUERY}"

    def __enter__(self):
        return self

    def __exit__(self, *_):
        self.process.send_signal(signal.SIGTERM)
        self.process.wait(10)

    def memory(self, what):
        """`VmRSS` or `VmHWM` in MiB."""
        status = Path(f"/proc/{self.process.pid}/status").read_text()
        return int(re.search(rf"{what}:\s+(\d+) kB", status)[1]) / 1024

    def upload(self, kind, source, **pipe):
        """Seconds of one `curl -T`."""
        command = ["curl", "-sS", "--fail", "-X", "POST", "-H", f"Content-Type: {MEDIA[kind]}"]
        command += ["-H", "Expect:", "-T", source, "-o", "/dev/null", self.url]
        begin = time.perf_counter()
        subprocess.run(command, check=True, **pipe)
        return time.perf_counter() - begin


def pieces(kind, path):
    """A file of rows as its head, rows that may be repeated any number of times, and its end."""
    text = path.read_bytes()
    if kind == "ndjson":
        return b"", text, b""
    if kind == "csv":
        head = text.index(b"\n") + 1
        return text[:head], text[head:], b""
    # The schema is the first message: marker, length of the metadata, metadata (Arrow columnar
    # format, "Encapsulated message format"); the end is a marker and a zero.
    head = 8 + int.from_bytes(text[4:8], "little")
    return text[:head], text[head:-8], text[-8:]


def stream(service, kind, path, size):
    """Sends `size` bytes of rows through a pipe; the seconds it takes."""
    head, body, end = pieces(kind, path)
    with subprocess.Popen(["cat"], stdin=subprocess.PIPE, stdout=subprocess.PIPE) as cat:
        upload = subprocess.Popen(
            ["curl", "-sS", "--fail", "-X", "POST", "-H", f"Content-Type: {MEDIA[kind]}", "-T", "-",
             "-o", "/dev/null", service.url],
            stdin=cat.stdout,
        )
        cat.stdout.close()
        begin = time.perf_counter()
        cat.stdin.write(head)
        for _ in range(-(-size // len(body))):
            cat.stdin.write(body)
        cat.stdin.write(end)
        cat.stdin.close()
        assert upload.wait() == 0, "the answer is whole"
        return time.perf_counter() - begin


def line(what, figure, ratio=""):
    print(f"| {what} | {figure} | {ratio} |", flush=True)


def million(count, seconds):
    return f"{count / seconds / 1e6:.2f} M rows/s"


def compare(options, kind, path, service, answer):
    """The lines of a format: in process, file to file, beside the peers and over HTTP."""
    count = options.rows
    ours = partial(in_process, options.bench, kind)
    peers = {name: partial(peer, name, path, answer) for name in PEERS if name.startswith(kind)}
    seconds = best(
        {
            "kernel": partial(kernel, options.bench, count),
            "one": partial(ours, 1, path),
            "two": partial(ours, 2, path),
            "file": partial(ours, 2, path, answer),
            "http": partial(service.upload, kind, path),
            **peers,
        }
    )
    one, two, file, http = (seconds[name] for name in ("one", "two", "file", "http"))
    size = f"{path.stat().st_size / count:.0f} bytes a row"
    line(f"{kind}: the transformation alone, exact, one thread", million(count, seconds["kernel"]))
    share = f"{1 - seconds['kernel'] / one:.2f} of reading and writing alone"
    line(f"{kind}, {size}, in process, one thread", million(count, one), share)
    line(f"{kind}, two threads", million(count, two), f"{one / two:.2f} of one thread")
    ratio = f"{two / http:.2f} of two threads in process, {file / http:.2f} of file to file"
    line(f"{kind} over HTTP, `curl -T file`", million(count, http), ratio)
    line(f"{kind}, file to file, two threads", million(count, file))
    for name in peers:
        what = PEERS[name].__doc__.strip(".")
        line(what, million(count, seconds[name]), f"{seconds[name] / file:.1f} times slower")


def flood(options, kind, path, service, idle):
    """The line of a long stream: its rate and the memory it takes."""
    size = int(options.gigabytes * 1e9)
    seconds = stream(service, kind, path, size)
    peak = service.memory("VmHWM")
    what = f"{kind}, {options.gigabytes:g} GB through a pipe, {size / seconds / 1e6:.0f} MB/s"
    line(what, f"{peak:.0f} MiB at most", f"{peak - idle:.0f} MiB above idle")


def measure(options, folder):
    paths = rows.write(options.rows, folder)
    print(f"| {options.rows} rows, each with its velocity | figure | ratio |\n|---|---|---|")
    for kind in options.formats:
        with Service(options.service, folder / "log") as service:
            idle = service.memory("VmRSS")
            compare(options, kind, paths[kind], service, folder / "answer")
            flood(options, kind, paths[kind], service, idle)


def main():
    parser = argparse.ArgumentParser(prog="tests/bench/series", description=__doc__)
    parser.add_argument("service", type=Path, help=argparse.SUPPRESS)
    parser.add_argument("bench", type=Path, help=argparse.SUPPRESS)
    parser.add_argument("--rows", type=int, default=1_000_001, help="rows of a file")
    parser.add_argument("--gigabytes", type=float, default=10, help="size of a stream for memory")
    parser.add_argument("--formats", nargs="*", choices=MEDIA, default=[*MEDIA])
    with tempfile.TemporaryDirectory(dir="/dev/shm") as folder:
        measure(parser.parse_args(), Path(folder))


if __name__ == "__main__":
    main()
