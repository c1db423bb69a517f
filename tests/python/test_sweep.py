"""A sweep against single readings and against the independent reference."""

import copy
import csv
import io

import pytest
from mpmath import mpf

from reference import solve
from reference.algebra import norm
from service import by_url
from test_accuracy import PROMISE, U, error

READING = {"e": [12.5, 340, -3.75], "b": [1200, -450, 44700],
           "units": {"e": "mV/m", "b": "nT", "velocity": "km/s", "angle": "deg"}}

# Name → (question with a gap, where the value goes, range).
SWEEPS = {
    "beta": ({"boost": {"direction": [1, 2, -2]}}, ("boost", "beta"), (-0.999, 0.9999999)),
    "beta backwards": ({"boost": {"direction": [0, 0, 3], "inverse": True}}, ("boost", "beta"), (0.9, 0)),
    "rapidity": ({"boost": {"direction": [1, 2, -2]}, "inverse": True}, ("boost", "rapidity"), (-20, 40)),
    "angle": ({"rotation": {"axis": [1, 1, 0]}}, ("rotation", "angle"), (-180, 540)),
    "angle before a fixed speed": (
        {"steps": [{"rotate": {"axis": [0, 0, 1]}}, {"boost": {"velocity": [7.6, 0, 0]}}]},
        ("steps", 0, "rotate", "angle"), (0, 360)),
    "speed of the second of two": (
        {"steps": [{"boost": {"beta": [0.1, 0.2, 0.3]}}, {"boost": {"direction": [0, 1, 0]}}]},
        ("steps", 1, "boost", "beta"), (0, 0.99)),
}


def filled(question, place, value):
    """The question with a value in its gap."""
    question = copy.deepcopy(question)
    at = question
    for step in place[:-1]:
        at = at[step]
    at[place[-1]] = value
    return question


def asked(service, name, points, **headers):
    way, place, (start, stop) = SWEEPS[name]
    question = READING | way
    over = {"over": place[-1], "start": start, "stop": stop, "points": points}
    reply = service.get(by_url(question | over, "/v1/sweep"), **headers)
    assert reply.status == 200, reply.body.decode()
    return reply, question, place


@pytest.mark.parametrize("name", SWEEPS)
def test_each_point_is_the_reading_asked_alone_and_exact(service, name):
    reply, question, place = asked(service, name, 13)
    columns = reply.json
    assert len(columns["values"]) == 13
    for i, value in enumerate(columns["values"]):
        single = filled(question, place, value)
        alone, exact = service.ask(single), solve(single)
        for field in "eb":
            vector = [columns[field][axis][i] for axis in "xyz"]
            assert vector == alone[field], value
            assert error(vector, getattr(exact, field)) <= PROMISE
            length = norm(getattr(exact, field))
            assert abs(columns[field]["magnitude"][i] - length) <= 4 * U * length


@pytest.mark.parametrize("name", SWEEPS)
def test_values_are_evenly_spaced_between_the_ends(service, name):
    start, stop = SWEEPS[name][2]
    values = asked(service, name, 101)[0].json["values"]
    assert values[0] == start and values[-1] == stop
    for i, value in enumerate(values):
        exact = mpf(start) + (mpf(stop) - mpf(start)) * i / 100
        assert abs(value - exact) <= 4 * U * max(abs(start), abs(stop))
        assert min(start, stop) <= value <= max(start, stop)


def test_csv_holds_the_same_numbers(service):
    columns = asked(service, "beta", 7)[0].json
    text = asked(service, "beta", 7, Accept="text/csv")[0].body.decode()
    rows = list(csv.DictReader(io.StringIO(text, newline="")))
    assert text.count("\r\n") == 8
    for i, row in enumerate(rows):
        assert float(row["beta"]) == columns["values"][i]
        for field in "eb":
            for axis in "xyz":
                assert float(row[field + axis]) == columns[field][axis][i]
            assert float(row[f"{field}_magnitude"]) == columns[field]["magnitude"][i]


def test_uncertainties_are_those_of_the_readings_asked_alone(service):
    """Those of a single reading are checked against outside references; here every point of a range has them."""
    question = {"e": [1.5, -2, 0.25], "b": [1e-8, 0, 2e-8],
                "uncertainty": {"e": [0.1, 0.2, 0.3], "b": [1e-10, 2e-10, 1e-10],
                                "boost": {"value": 0.01, "direction": 0.02}}}
    direction = {"direction": [1, 2, -2]}
    over = {"over": "rapidity", "start": -1, "stop": 2, "points": 5}
    url = by_url(question | {"boost": direction} | over, "/v1/sweep")
    columns = service.get(url).json
    rows = list(csv.DictReader(io.StringIO(service.get(url, Accept="text/csv").body.decode(), newline="")))
    for i, rapidity in enumerate(columns["values"]):
        alone = service.post(question | {"boost": direction | {"rapidity": rapidity}}).json["uncertainty"]
        for field in "eb":
            own = columns["uncertainty"][field]
            assert [own[axis][i] for axis in "xyz"] == alone[field]
            assert own["magnitude"][i] == alone["magnitudes"][field]["uncertainty"]
            assert [float(rows[i][f"u_{field}{axis}"]) for axis in "xyz"] == alone[field]
            assert float(rows[i][f"u_{field}_magnitude"]) == own["magnitude"][i]


def test_a_cache_can_keep_it(service):
    """RFC 9110 § 13.1.2: If-None-Match with the tag is answered 304."""
    reply = asked(service, "angle", 5)[0]
    assert asked_again(service, reply).status == 304
    assert reply.headers["vary"] == "accept" and "max-age" in reply.headers["cache-control"]


def asked_again(service, reply):
    way, place, (start, stop) = SWEEPS["angle"]
    over = {"over": "angle", "start": start, "stop": stop, "points": 5}
    return service.get(by_url(READING | way | over, "/v1/sweep"), If_None_Match=reply.headers["etag"])
