"""Series in every format: the same doubles, whatever wrote the rows and whatever reads them."""

import csv
import io
import json
import random
import subprocess

import numpy as np
import pandas
import polars
import pyarrow
import pytest
from mpmath import mpf
from pyarrow import csv as arrow_csv

import series
from reference import solve
from reference.algebra import norm
from regimes import C
from series import ARROW, CSV, FIELD, NDJSON, VELOCITY

WHERE = series.path(velocity="row")
ROWS = series.questions(240, "formats")


def table(rows=ROWS, **more):
    return pyarrow.table(series.columns(rows) | more)


def arrow(rows):
    """An Arrow table as an IPC stream, in batches of a few rows."""
    out = io.BytesIO()
    with pyarrow.ipc.new_stream(out, rows.schema) as stream:
        stream.write_table(rows, max_chunksize=37)
    return out.getvalue()


def plain_csv(rows):
    """A table by Python's csv, numbers in their shortest form."""
    out = io.StringIO()
    writer = csv.writer(out)
    writer.writerow(rows.column_names)
    writer.writerows(zip(*(column.to_pylist() for column in rows.columns)))
    return out.getvalue().encode()


def fields(kind, body):
    """The field of each row of an answer: lists of six doubles, and what else its rows hold."""
    if kind == NDJSON:
        *rows, end = map(json.loads, body.splitlines())
        assert end["end"] == {"read": len(rows), "answered": len(rows), "refused": 0}
        return [[*row.get("e"), *row.get("b")] for row in rows]
    if kind == CSV:
        rows = csv.DictReader(io.StringIO(body.decode(), newline=""))
        return [[float(row[name]) for name in FIELD] for row in rows]
    with pyarrow.ipc.open_stream(body) as stream:
        answer = stream.read_all()
    assert answer.column_names[-1] == "problem" and answer["problem"].null_count == len(answer)
    return np.array([answer[name] for name in FIELD]).T.tolist()


SENT = {NDJSON: series.ndjson(ROWS), CSV: plain_csv(table()), ARROW: arrow(table())}


@pytest.fixture(scope="module")
def alone(service):
    """Each row asked as a single reading."""
    replies = service.post_all(ROWS)
    return [[*reply.json["e"], *reply.json["b"]] for reply in replies]


@pytest.mark.parametrize("sent", SENT)
@pytest.mark.parametrize("read", SENT)
def test_every_format_gives_the_doubles_of_single_readings(service, alone, sent, read):
    reply = series.send(service, WHERE, sent, SENT[sent], read)
    assert reply.status == 200, reply.body
    assert fields(read, reply.body) == alone


def written_by(name, rows):
    """The same rows as other programs write them: the format, and the bytes."""
    out = io.BytesIO()
    if name == "pandas csv":
        rows.to_pandas().to_csv(out, index=False)
    elif name == "polars csv":
        polars.from_arrow(rows).write_csv(out)
    elif name == "PyArrow csv":
        arrow_csv.write_csv(rows, out)
    elif name == "polars ndjson":
        three = [polars.concat_list(names).alias(key) for key, names in
                 {"e": FIELD[:3], "b": FIELD[3:], "velocity": VELOCITY}.items()]
        polars.from_arrow(rows).select(three).write_ndjson(out)
    elif name == "polars Arrow":
        polars.from_arrow(rows).write_ipc_stream(out)
    elif name == "pandas Arrow":
        batch = pyarrow.RecordBatch.from_pandas(rows.to_pandas())
        with pyarrow.ipc.new_stream(out, batch.schema) as stream:
            stream.write_batch(batch)
    kind = {"csv": CSV, "ndjson": NDJSON, "Arrow": ARROW}[name.split()[1]]
    return kind, out.getvalue()


WRITERS = ["pandas csv", "polars csv", "PyArrow csv", "polars ndjson", "polars Arrow", "pandas Arrow"]


@pytest.mark.parametrize("writer", WRITERS)
def test_rows_of_other_programs_are_understood(service, alone, writer):
    kind, body = written_by(writer, table())
    reply = series.send(service, WHERE, kind, body)
    assert reply.status == 200, reply.body
    assert fields(kind, reply.body) == alone


def test_other_programs_read_what_comes(service, alone):
    answers = {kind: io.BytesIO(series.send(service, WHERE, kind, SENT[kind]).body) for kind in SENT}
    off = io.BytesIO(series.send(service, WHERE + "&end=off", NDJSON, SENT[NDJSON]).body)
    frames = {
        "pandas csv": pandas.read_csv(answers[CSV])[FIELD].to_numpy(),
        "PyArrow Arrow": pyarrow.ipc.open_stream(answers[ARROW]).read_pandas()[FIELD].to_numpy(),
    }
    answers[CSV].seek(0)
    frames["polars csv"] = polars.read_csv(answers[CSV])[FIELD].to_numpy()
    answers[CSV].seek(0)
    by_arrow = arrow_csv.read_csv(answers[CSV])
    frames["PyArrow csv"] = np.array([by_arrow[name] for name in FIELD]).T
    answers[ARROW].seek(0)
    frames["polars Arrow"] = polars.read_ipc_stream(answers[ARROW])[FIELD].to_numpy()
    lines = polars.read_ndjson(off)
    halves = [np.array(lines[name].to_list()) for name in ("e", "b")]
    frames["polars ndjson"] = np.concatenate(halves, axis=1)
    for reader, found in frames.items():
        assert found.tolist() == alone, reader


# Texts that a table must keep: RFC 4180 §2 (quotes, commas, line ends inside a field), and others.
TEXTS = ["plain", "", " spaces ", "a,b", 'say "so"', '""', "two\nlines", "two\r\nlines", "ünïcode 𝄞", "'", "=1+1", "\t"]


@pytest.mark.parametrize("end", ["\r\n", "\n"])
@pytest.mark.parametrize("quoting", [csv.QUOTE_MINIMAL, csv.QUOTE_ALL, csv.QUOTE_NONNUMERIC])
@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"])
def test_a_table_reads_as_by_the_csv_module(service, end, quoting, mark):
    """Whatever Python's csv writes is read, and whatever comes back it reads the same."""
    rng = random.Random(end)
    rows = [[text, rng.choice(TEXTS), *([rng.uniform(-1, 1) for _ in range(3)]), i] for i, text in enumerate(TEXTS)]
    out = io.StringIO(newline="")
    writer = csv.writer(out, lineterminator=end, quoting=quoting)
    header = ["first, column", 'a "second"', "bx", "by", "bz", "n"]
    writer.writerow(header)
    writer.writerows(rows)
    where = series.path(**{"rotation.axis": "0,0,1", "rotation.angle": "90", "units.angle": "deg"})
    reply = series.send(service, where, CSV, mark + out.getvalue().encode())
    assert reply.status == 200, reply.body
    text = reply.body.decode("utf-8-sig")
    found = list(csv.reader(io.StringIO(text, newline="")))
    assert found[0] == [*header, "problem"]
    assert len(found) == len(rows) + 1
    for row, (first, second, bx, by, bz, n, problem) in zip(rows, found[1:]):
        assert [first, second, int(n), problem] == [row[0], row[1], row[5], ""]
        assert [float(bx), float(by), float(bz)] == [row[3], -row[2] + 0.0, row[4]]


def test_missing_is_missing_in_every_format(service):
    """A row without B, one without a velocity, one whole: only the last is answered."""
    rows = [dict(row) for row in ROWS[:3]]
    flat = series.columns(rows)
    for name in FIELD[3:]:
        flat[name][0] = None
    flat["vy"][1] = None
    missing = [[None] * 6, [None] * 6]
    whole = service.ask(rows[2])
    expected = [*missing, [*whole["e"], *whole["b"]]]
    sent = pyarrow.table(flat)
    not_numbers = pyarrow.table({name: [np.nan if x is None else x for x in column] for name, column in flat.items()})
    for body, kind in [(plain_csv(sent), CSV), (plain_csv(not_numbers), CSV), (arrow(sent), ARROW), (arrow(not_numbers), ARROW)]:
        reply = series.send(service, WHERE, kind, body, ARROW)
        answer = pyarrow.ipc.open_stream(reply.body).read_all()
        found = [[row[name] for name in FIELD] for row in answer.to_pylist()]
        # With a component missing, what does not depend on it may stand.
        found[0] = [None if x is None or abs(x) == 0 else x for x in found[0]]
        assert found[1:] == expected[1:], kind
        assert answer["problem"].null_count == 3


def test_a_generated_archive_as_numpy_would_have_it(service, report_error, tmp_path):
    """All of it within the rounding of plain doubles; a sample within the promise, by mpmath."""
    rng = np.random.default_rng(3)
    count = 100_000
    e, b, v = (size * rng.uniform(-1, 1, (3, count)) for size in (1e3, 5e-5, 1e8))
    rows = pyarrow.table([*e, *b, *v], names=FIELD + VELOCITY)
    sent = tmp_path / "rows"
    sent.write_bytes(arrow(rows))
    client = series.curl(service, WHERE, ARROW, "-T", sent, stdout=subprocess.PIPE)
    answer = pyarrow.ipc.open_stream(client.communicate()[0]).read_all()
    assert client.returncode == 0
    found_e, found_b = (np.array([answer[name] for name in names]) for names in (FIELD[:3], FIELD[3:]))
    # Jackson, Classical Electrodynamics, 3rd ed., eq. 11.149, in plain doubles.
    beta = v / C
    gamma = 1 / np.sqrt(1 - (beta * beta).sum(axis=0))
    k = gamma**2 / (gamma + 1)
    cross = lambda p, q: np.cross(p, q, axis=0)  # noqa: E731
    plain_e = gamma * (e + cross(v, b)) - k * beta * (beta * e).sum(axis=0)
    plain_b = gamma * (b - cross(beta, e) / C) - k * beta * (beta * b).sum(axis=0)
    size = gamma * (np.linalg.norm(e, axis=0) + C * np.linalg.norm(b, axis=0))
    for off, unit in ((found_e - plain_e, 1), (found_b - plain_b, C)):
        assert (np.linalg.norm(off, axis=0) * unit <= 16 * 2.0**-53 * size * gamma).all()
    worst = 0
    for i in rng.choice(count, 200, replace=False):
        exact = solve({"e": e[:, i].tolist(), "b": b[:, i].tolist(), "velocity": v[:, i].tolist()})
        for found, right in ((found_e[:, i], exact.e), (found_b[:, i], exact.b)):
            off = [mpf(float(x)) - y for x, y in zip(found, right)]
            worst = max(worst, float(norm(off) / norm(right) * 2**53))
    report_error("rows of an archive", 400, worst)
    assert worst <= 1.01


def test_other_columns_pass_in_arrow_untouched(service):
    """Any type, in its place, chunk by chunk (Arrow columnar format)."""
    few = table(ROWS[:5])
    times = pyarrow.array([0, 1, None, 3, 4], pyarrow.timestamp("us", "UTC"))
    others = {
        "when": times,
        "station": pyarrow.array(["mast", None, "roof", "mast", ""]).dictionary_encode(),
        "spectrum": pyarrow.array([[1.5, 2], [], None, [3], [4]], pyarrow.list_(pyarrow.float32())),
        "raw": pyarrow.array([b"\0", b"", None, b"ab", b"c"]),
        "flags": pyarrow.array([{"a": 1, "b": True}] * 5),
    }
    sent = few
    for i, (name, column) in enumerate(others.items()):
        sent = sent.add_column(2 * i, name, column)
    reply = series.send(service, WHERE, ARROW, arrow(sent))
    answer = pyarrow.ipc.open_stream(reply.body).read_all()
    assert answer.column_names == [*sent.column_names, "problem"]
    for name in others:
        assert answer.schema.field(name).type == sent.schema.field(name).type
        assert answer[name].to_pylist() == sent[name].to_pylist(), name


def test_numbers_of_other_arrow_types_are_numbers(service):
    """Single precision and whole numbers are exact as doubles."""
    rows = {name: pyarrow.array([1, 2], pyarrow.int32()) for name in FIELD[:3]}
    rows |= {name: pyarrow.array([0.5, 0.25], pyarrow.float32()) for name in FIELD[3:]}
    rows |= {name: pyarrow.array([1000.0, 2000.0]) for name in VELOCITY}
    reply = series.send(service, WHERE, ARROW, arrow(pyarrow.table(rows)))
    answer = pyarrow.ipc.open_stream(reply.body).read_all()
    for i, row in enumerate(zip(*(column.to_pylist() for column in rows.values()))):
        right = service.ask({"e": row[:3], "b": row[3:6], "velocity": row[6:]})
        assert [answer[name][i].as_py() for name in FIELD] == [*right["e"], *right["b"]]
