"""Series of rows as their users send and read them: the service over `curl`, and rows to send."""

import json
import random
import subprocess
import urllib.parse

import regimes

NDJSON = "application/x-ndjson"
CSV = "text/csv"
ARROW = "application/vnd.apache.arrow.stream"

FIELD = ["ex", "ey", "ez", "bx", "by", "bz"]
VELOCITY = ["vx", "vy", "vz"]

# What a reading with a velocity of its own can be, by name; see `regimes`.
KINDS = ["slow", "fast", "motional_cancels", "magnetic_dominates", "electric_dominates", "comparable"]


def path(**query):
    """The address of a series with this query."""
    words = {name: value if isinstance(value, str) else json.dumps(value) for name, value in query.items()}
    return "/v1/series?" + urllib.parse.urlencode(words, quote_via=urllib.parse.quote)


def questions(count, seed):
    """Readings of all kinds, each with a velocity."""
    rng = random.Random(seed)
    made = []
    for i in range(count):
        question = getattr(regimes, KINDS[i % len(KINDS)])(rng)
        beta = question.pop("boost", {}).get("beta")
        if beta:
            question["velocity"] = [regimes.C * x for x in beta]
        question.setdefault("velocity", regimes.vector(rng, 3e7))
        made.append(question)
    return made


def ndjson(rows):
    """Rows as lines of JSON."""
    return b"".join(json.dumps(row).encode() + b"\n" for row in rows)


def columns(rows):
    """The same rows as columns by name."""
    flat = [[*row["e"], *row["b"], *row["velocity"]] for row in rows]
    return dict(zip(FIELD + VELOCITY, map(list, zip(*flat))))


def send(service, where, kind, body, accept=None):
    """One series over a connection of the standard library, for answers of moderate size."""
    headers = {"Content-Type": kind} | ({"Accept": accept} if accept else {})
    return service.request("POST", where, body, headers)


def curl(service, where, kind, *arguments, **process):
    """A running `curl` that sends and reads a series."""
    command = ["curl", "-sS", "-N", "-X", "POST", "-H", f"Content-Type: {kind}", "-H", "Expect:"]
    return subprocess.Popen([*command, *arguments, service.url + where], **process)


def problem(reply, status, code):
    """Checks that a reply is this problem, and gives its faults."""
    assert reply.status == status, reply.body[:2000]
    assert reply.headers["content-type"] == "application/problem+json"
    assert reply.json["type"] == f"/problems/{code}", reply.json
    return reply.json["errors"]


def memory(service, what="VmHWM"):
    """The most memory that the service ever had (`VmHWM`), or has now (`VmRSS`), in MiB."""
    with open(f"/proc/{service.process.pid}/status") as status:
        line = next(line for line in status if line.startswith(f"{what}:"))
    return int(line.split()[1]) / 1024
