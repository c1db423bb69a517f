"""What a series says beside its numbers, notices and uncertainties of the way: as single readings do."""

import csv
import io
import json

import pyarrow
import pytest

import series
from series import ARROW, CSV, FIELD, NDJSON, VELOCITY

U = [f"u_{name}" for name in FIELD]
UNITS = {"units.e": "mV/m", "units.b": "nT", "units.velocity": "km/s", "units.angle": "deg"}
# One component to fill, none, two missing, B too flat, a strong field that is filled.
ROWS = [
    {"e": [3, -4, None], "b": [20000, -30000, 40000], "velocity": [7.6, 0, 0]},
    {"e": [3, -4, 2], "b": [20000, -30000, 40000], "velocity": [7.6, 1, 0]},
    {"e": [None, None, 2], "b": [20000, -30000, 40000], "velocity": [7.6, 0, 2]},
    {"e": [3, -4, None], "b": [20000, -30000, 1], "velocity": [7.6, 0, 0]},
    {"e": [None, -4, 3], "b": [8e8, 2e8, 1e8], "velocity": [0.5, 0, 0]},
]
ASSUME = {"e_dot_b_zero": {"min_angle": 15}}


def flat(rows):
    return {name: list(column) for name, column in
            zip(FIELD + VELOCITY, zip(*([*row["e"], *row["b"], *row["velocity"]] for row in rows)))}


def sent(kind, rows):
    """Rows written by the standard library or PyArrow."""
    if kind == NDJSON:
        return series.ndjson(rows)
    if kind == ARROW:
        table = pyarrow.table({name: pyarrow.array(column, pyarrow.float64()) for name, column in flat(rows).items()})
        out = io.BytesIO()
        with pyarrow.ipc.new_stream(out, table.schema) as stream:
            stream.write_table(table, max_chunksize=2)
        return out.getvalue()
    out = io.StringIO(newline="")
    writer = csv.writer(out)
    writer.writerow(FIELD + VELOCITY)
    writer.writerows(zip(*flat(rows).values()))
    return out.getvalue().encode()


def told(kind, body):
    """Of each row: its numbers and their uncertainties, its notices, whether it has a problem."""
    if kind == NDJSON:
        *rows, _ = map(json.loads, body.splitlines())
        numbers = lambda row, part: (row[part] or [None] * 3) if part in row else None  # noqa: E731
        return [([*numbers(row, "e"), *numbers(row, "b")],
                 [x for part in "eb" for x in row["uncertainty"][part]] if row.get("uncertainty") else [None] * 6,
                 row.get("notices", []), "problem" in row) for row in rows]
    if kind == CSV:
        table = csv.DictReader(io.StringIO(body.decode(), newline=""))
        assert table.fieldnames[-1] == "problem"
        rows = [{name: float(text) if name in FIELD + U and text else text or None for name, text in row.items()}
                for row in table]
    else:
        answer = pyarrow.ipc.open_stream(body).read_all()
        assert answer.column_names[-1] == "problem"
        rows = answer.to_pylist()
    return [([row[name] for name in FIELD], [row.get(name) for name in U],
             (row.get("notices") or "").split(), row["problem"] is not None) for row in rows]


def alone(service, question):
    """The same of a single reading."""
    reply = service.post(question)
    if reply.status != 200:
        return [None] * 6, [None] * 6, [], True
    answer = reply.json
    known = answer.get("uncertainty")
    # What propagation and trials have to say is not said of rows.
    codes = [notice["code"] for notice in answer["notices"] if "uncertain" not in notice["code"]]
    return ([*answer["e"], *answer["b"]], [*known["e"], *known["b"]] if known else [None] * 6,
            list(dict.fromkeys(codes)), False)


KINDS = [NDJSON, CSV, ARROW]


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("read", KINDS)
def test_notices_are_those_of_single_readings_in_every_format(service, kind, read):
    where = series.path(velocity="row", assume=ASSUME, **UNITS)
    units = {name.removeprefix("units."): unit for name, unit in UNITS.items()}
    reply = series.send(service, where, kind, sent(kind, ROWS), read)
    assert reply.status == 200, reply.body
    expected = [alone(service, row | {"assume": ASSUME, "units": units}) for row in ROWS]
    assert told(read, reply.body) == expected
    assert [codes for _, _, codes, _ in expected] == [
        ["e_dot_b_assumed"], [], ["missing_component"], [], ["e_dot_b_assumed", "strong_field"]]
    assert [refused for *_, refused in expected] == [False, False, False, True, False]


@pytest.mark.parametrize("kind", KINDS)
def test_the_usual_answer_has_no_such_column(service, kind):
    reply = series.send(service, series.path(velocity="row", **UNITS), kind, sent(kind, ROWS))
    assert b"notices" not in reply.body and b"u_ex" not in reply.body


WAYS = [
    {"velocity": "row", "uncertainty": {"velocity": [0.01, 0.02, 0.03]}},
    {"velocity": "row", "inverse": True, "uncertainty": {"velocity": {"covariance": [[4, 1, 0], [1, 4, 0], [0, 0, 1]]}}},
    {"boost": {"velocity": "row", "inverse": True}, "uncertainty": {"boost": [0.01, 0, 0]}},
    {"steps": [{"rotate": {"axis": [1, 2, 2], "angle": 40, "uncertainty": [0.1, 0.2, 0.3]}},
               {"boost": {"velocity": "row", "uncertainty": [0.01, 0.02, 0]}}]},
]


@pytest.mark.parametrize("way", WAYS, ids=lambda way: "+".join(way))
@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("read", KINDS)
def test_uncertainties_of_the_way_have_the_bits_of_single_readings(service, way, kind, read):
    rows = ROWS[1:2] + [ROWS[1] | {"velocity": [-300, 1e5, 40]}]
    # The uncertainty of a way is one object in a query too.
    reply = series.send(service, series.path(**way, **UNITS), kind, sent(kind, rows), read)
    assert reply.status == 200, reply.body
    units = {name.removeprefix("units."): unit for name, unit in UNITS.items()}

    def own(row):
        velocity = json.dumps(row["velocity"])
        return json.loads(json.dumps(way).replace('"row"', velocity)) | {"e": row["e"], "b": row["b"], "units": units}

    expected = [alone(service, own(row)) for row in rows]
    found = [numbers[:2] for numbers in told(read, reply.body)]
    assert found == [numbers[:2] for numbers in expected]
    assert all(x is not None for _, known, *_ in expected for x in known)
