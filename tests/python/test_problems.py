"""Every problem that the service can report, provoked over HTTP, in the body and in the URL."""

import json
import socket
import time

import pytest

from service import JSON, Service, by_url

GOOD = {"e": [0, 1, 0], "b": [0, 0, 1], "velocity": [100, 0, 0]}


def boost(**form):
    return {"e": [0, 1, 0], "b": [0, 0, 1], "boost": form}


def turn(**form):
    return {"e": [0, 1, 0], "b": [0, 0, 1], "rotation": form}


def uncertain(**stated):
    return GOOD | {"uncertainty": stated}


SWEEP = "/v1/sweep?e=0,1,0&b=0,0,1&boost.direction=1,0,0&over=beta"

# Faults of a question: code, question, the place that is named (RFC 6901).
FAULTS = [
    ("number_out_of_range", b'{"e": [0, 1e999, 0], "b": [0, 0, 1], "velocity": [1, 0, 0]}', None),
    ("unknown_field", GOOD | {"speed": 1}, "/speed"),
    ("unknown_field", boost(beta=[0.1, 0, 0], inversed=True), "/boost/inversed"),
    ("repeated_field", b'{"e": [0, 1, 0], "e": [0, 1, 0], "b": [0, 0, 1], "velocity": [1, 0, 0]}', "/e"),
    ("wrong_type", json.dumps(GOOD | {"e": 1}).encode(), "/e"),  # by URL one number is a list of one
    ("wrong_type", GOOD | {"b": [0, "north", 0]}, "/b/1"),
    ("wrong_length", GOOD | {"e": [0, 1]}, "/e"),
    ("wrong_length", turn(matrix=[[1, 0, 0], [0, 1, 0]]), "/rotation/matrix"),
    ("missing_field", {"e": [0, 1, 0], "b": [0, 0, 1]}, ""),
    ("missing_field", turn(axis=[0, 0, 1]), "/rotation"),
    ("conflicting_fields", GOOD | {"rotation": {"axis": [0, 0, 1], "angle": 1}}, None),
    ("conflicting_fields", boost(beta=[0.1, 0, 0], velocity=[1, 0, 0]), None),
    ("unknown_unit", GOOD | {"units": {"e": "mv/m"}}, "/units/e"),
    ("unknown_choice", GOOD | {"include": ["tensors"]}, "/include/0"),
    ("unknown_choice", turn(euler={"axes": "zyx", "angles": [1, 2, 3], "about": "rolling"}), "/rotation/euler/about"),
    ("unknown_choice", boost(direction=[1, 0, 0], kinetic_energy=1, particle="pion"), "/boost/particle"),
    ("faster_than_light", GOOD | {"velocity": [299792458, 0, 0]}, "/velocity"),
    ("faster_than_light", boost(beta=[0.6, 0.8, 0.1]), "/boost/beta"),
    ("no_direction", turn(axis=[0, 0, 0], angle=1), "/rotation/axis"),
    ("no_direction", boost(direction=[0, 0, 0], gamma=2), "/boost/direction"),
    ("below_rest", boost(direction=[1, 0, 0], gamma=0.5), "/boost/gamma"),
    ("below_rest", boost(direction=[1, 0, 0], kinetic_energy=-1, particle="proton"), "/boost/kinetic_energy"),
    ("not_a_rotation", turn(quaternion={"w": 1, "x": 1, "y": 0, "z": 0}), "/rotation/quaternion"),
    ("negative_uncertainty", uncertain(e=[0.1, -0.1, 0.1]), "/uncertainty/e/1"),
    ("negative_uncertainty", uncertain(velocity={"covariance": [[1, 0, 0], [0, -1, 0], [0, 0, 1]]}),
     "/uncertainty/velocity/covariance/1/1"),
    ("negative_uncertainty", boost(direction=[1, 0, 0], gamma=2, uncertainty={"value": -1}), "/boost/uncertainty/value"),
    ("not_symmetric", uncertain(b={"covariance": [[1, 0.1, 0], [0.2, 1, 0], [0, 0, 1]]}),
     "/uncertainty/b/covariance/0/1"),
    ("not_positive_semidefinite", uncertain(covariance=[[1 if i == j else -0.5 for j in range(6)] for i in range(6)]),
     "/uncertainty/covariance"),
    ("not_positive_semidefinite", uncertain(e={"covariance": [[4, 3, 0], [3, 1, 0], [0, 0, 1]]}),
     "/uncertainty/e/covariance"),
    ("uncertain_at_rest", boost(direction=[1, 0, 0], gamma=1, uncertainty={"value": 0.1}), "/boost/uncertainty"),
    ("trials_out_of_range", uncertain(e=[0.1, 0.1, 0.1]) | {"monte_carlo": {"trials": 9999}}, "/monte_carlo/trials"),
    ("trials_out_of_range", uncertain(e=[0.1, 0.1, 0.1]) | {"monte_carlo": {"trials": 1e7}}, "/monte_carlo/trials"),
    ("nothing_uncertain", GOOD | {"monte_carlo": {"trials": 20000}}, "/monte_carlo"),
    ("wrong_length", uncertain(e=[0.1, 0.1]), "/uncertainty/e"),
    ("wrong_length", uncertain(covariance=[[1, 0], [0, 1]]), "/uncertainty/covariance"),
    ("missing_field", uncertain(e=[0.1, None, 0.1]), "/uncertainty/e/1"),
    ("conflicting_fields", uncertain(rotation=[0.1, 0.1, 0.1]), "/uncertainty/rotation"),
    ("conflicting_fields", uncertain(e=[0.1, 0.1, 0.1], covariance=[[0] * 6] * 6), "/uncertainty/e"),
    ("conflicting_fields", boost(beta=[0.1, 0, 0], uncertainty=[0, 0, 0]) | {"uncertainty": {"boost": [0, 0, 0]}},
     "/uncertainty/boost"),
    ("unknown_field", uncertain(time=1), "/uncertainty/time"),
    ("unknown_frame", {"e": [0, 1, 0], "from": "probe", "to": "ground"}, "/from"),
    ("angle_out_of_range", GOOD | {"assume": {"e_dot_b_zero": {"min_angle": 15}}}, "/assume/e_dot_b_zero/min_angle"),
    ("field_in_plane", {"e": [1, 2, None], "b": [1, 1, 0], "velocity": [0, 0, 0],
                        "assume": {"e_dot_b_zero": {"min_angle": 0.2}}}, "/assume"),
    ("too_many_steps", {"e": [0, 1, 0], "b": [0, 0, 1], "steps": [{"boost": {"beta": [0, 0, 0]}}] * 1001}, "/steps"),
    ("overflow", {"e": [0, 1e300, 0], "b": [0, 0, 1], "boost": {"direction": [1, 0, 0], "gamma": 1e20}}, None),
    ("precision_exhausted", {"e": [0, 1, 0], "b": [0, 0, 1], "steps": [
        {"boost": {"direction": [1, 0, 0], "rapidity": rapidity}} for rapidity in 10 * [700, -700]]}, None),
]

# Problems of a request: code, method, path, body, headers.
REQUESTS = [
    ("syntax", "POST", "/v1/transform", b'{"e": [0, 1, 0],}', JSON),
    ("syntax", "POST", "/v1/transform", b"", JSON),
    ("syntax", "POST", "/v1/transform", b'{"e": [NaN, 0, 0]}', JSON),
    ("syntax", "POST", "/v1/transform", b'{"e": [Infinity, 0, 0]}', JSON),
    ("syntax", "POST", "/v1/transform", b'{"e": "\xff"}', JSON),
    ("syntax", "POST", "/v1/transform", b"[" * 100_000, JSON),
    ("syntax", "POST", "/v1/transform", json.dumps(GOOD).encode() + b"{}", JSON),
    ("syntax", "GET", "/v1/transform?e=%zz", None, {}),
    ("syntax", "GET", "/v1/transform?e=0,1,0&b=0,0,1&steps=%5B%7B", None, {}),
    ("points_out_of_range", "GET", SWEEP + "&start=0&stop=0.5&points=1", None, {}),
    ("empty_range", "GET", SWEEP + "&start=0.5&stop=0.5", None, {}),
    ("faster_than_light", "GET", SWEEP + "&start=0&stop=1", None, {}),
    ("not_found", "GET", "/v1/nothing", None, {}),
    ("unknown_code", "GET", "/problems/nothing", None, {}),
    ("method_not_allowed", "PUT", "/v1/transform", json.dumps(GOOD).encode(), JSON),
    ("not_acceptable", "GET", by_url(GOOD), None, {"Accept": "application/pdf"}),
    ("not_acceptable", "POST", "/v1/transform", json.dumps(GOOD).encode(), JSON | {"Accept": "image/png"}),
    ("unsupported_media_type", "POST", "/v1/transform", json.dumps(GOOD).encode(), {"Content-Type": "text/plain"}),
    ("unsupported_media_type", "POST", "/v1/transform", json.dumps(GOOD).encode(), {}),
    ("body_too_large", "POST", "/v1/transform", b" " * (1 << 20) + b"{}", JSON),
    ("uri_too_long", "GET", "/v1/transform?e=" + "1" * 20_000, None, {}),
    ("headers_too_large", "GET", "/health/live", None, {"X-Long": "x" * 40_000}),
]

# Provoked by tests of their own, below and in test_frames.py.
OTHERS = {"request_timeout", "overloaded", "wrong_time", "time_needed", "time_outside_track", "axis_not_measured"}

# Codes that no single question brings about here, and why.
OUT_OF_REACH = {
    "internal": "only a fault of the service itself brings it about",
    "too_many_requests": "no limit of requests for each client can be set",
    "unauthorized": "this service asks for no token; tests/access.rs provokes it",
    "row_too_long": "of a series; test_series_stream.py provokes it",
    "batch_too_large": "of a series; tests/arrow.rs provokes it",
    "stopping": "of a series when the service ends; tests/life.rs provokes it",
} | dict.fromkeys(
    ("unknown_parent", "frame_cycle", "several_roots", "sensor_not_leaf", "singular_matrix", "unsorted_times",
     "repeated_time", "gap_too_long", "attitude_jump", "unreadable_file"),
    "found when a catalogue is loaded; tests/frames.rs provokes it",
)


def check_document(reply, code):
    """An RFC 9457 problem document whose type explains itself at its own address."""
    problem = reply.json
    assert problem["type"] == f"/problems/{code}", reply.body.decode()
    assert reply.headers["content-type"] == "application/problem+json"
    assert problem["status"] == reply.status and problem["title"] and problem["detail"]
    assert problem["instance"] == f"urn:uuid:{reply.headers['x-request-id']}"
    return problem


def test_no_code_is_left_out(service):
    known = {entry["code"] for entry in service.get("/problems").json}
    provoked = {row[0] for row in FAULTS + REQUESTS} | OTHERS
    assert known - provoked == OUT_OF_REACH.keys()


@pytest.mark.parametrize("code, question, place", FAULTS, ids=[f"{row[0]} {i}" for i, row in enumerate(FAULTS)])
def test_a_fault_of_the_question(service, code, question, place):
    (fault,) = check_document(service.post(question), code)["errors"]
    assert fault["code"] == code and fault["detail"]
    assert place is None or fault["pointer"] == place
    if isinstance(question, dict) and len(by_url(question)) < 8192:
        (by_parameter,) = check_document(service.get(by_url(question)), code)["errors"]
        assert by_parameter["code"] == code and by_parameter["detail"]
        assert by_parameter["parameter"] == fault["pointer"].strip("/").replace("/", ".")


@pytest.mark.parametrize("code, method, path, body, headers", REQUESTS,
                         ids=[f"{row[0]} {i}" for i, row in enumerate(REQUESTS)])
def test_a_problem_of_the_request(service, code, method, path, body, headers):
    reply = service.request(method, path, body, headers)
    problem = check_document(reply, code)
    explained = service.get(f"/problems/{code}", Accept="application/json").json
    assert explained["status"] == problem["status"] == reply.status
    assert explained["mend"] and explained["about"]
    if code == "method_not_allowed":
        assert {"GET", "POST"} <= {name.strip() for name in reply.headers["allow"].split(",")}


def test_six_mistakes_get_one_answer_that_names_all_six(service):
    reply = service.post({
        "e": [1, 2],
        "b": [0, "north", 0],
        "colour": "red",
        "units": {"velocity": "mph"},
        "steps": [{"boost": {"beta": [0.8, 0.8, 0]}}, {"rotate": {"quaternion": {"w": 2, "x": 0, "y": 0, "z": 0}}}],
    })
    assert reply.status == 400
    found = {(fault["code"], fault["pointer"]) for fault in reply.json["errors"]}
    assert found == {
        ("wrong_length", "/e"),
        ("wrong_type", "/b/1"),
        ("unknown_field", "/colour"),
        ("unknown_unit", "/units/velocity"),
        ("faster_than_light", "/steps/0/boost/beta"),
        ("not_a_rotation", "/steps/1/rotate/quaternion"),
    }
    assert all(len(fault["detail"]) > 20 for fault in reply.json["errors"])


def test_only_impossible_values_are_422(service):
    """All faults are of physics: the question was understood."""
    reply = service.post({"e": [1, 2, 3], "b": [1, 2, 3], "steps": [
        {"boost": {"beta": [2, 0, 0]}}, {"rotate": {"axis": [0, 0, 0], "angle": 1}}]})
    assert reply.status == 422
    assert [fault["code"] for fault in reply.json["errors"]] == ["faster_than_light", "no_direction"]


def test_a_repeated_parameter(service):
    reply = service.get("/v1/transform?e=0,1,0&e=0,1,0&b=0,0,1&velocity=1,0,0")
    (fault,) = check_document(reply, "repeated_field")["errors"]
    assert fault["parameter"] == "e"


@pytest.mark.parametrize("status, head", [
    (414, b"GET /" + b"1" * 100_000 + b" HTTP/1.1\r\nHost: x\r\n\r\n"),
    (431, b"GET / HTTP/1.1\r\nX: " + b"x" * 1_000_000)])
def test_heads_past_the_limits_of_the_parser_are_refused_too(service, status, head):
    """Too large to be read at all: refused with the same status, but nothing to write a document for."""
    assert service.raw(head).status == status
    assert service.get("/health/live").status == 200


def test_a_request_that_does_not_arrive(tmp_path):
    """A body that stays away for longer than --request-timeout."""
    with Service(tmp_path / "log.txt", "--request-timeout", "300ms") as slow:
        reply = slow.raw(b"POST /v1/transform HTTP/1.1\r\nHost: x\r\nContent-Type: application/json\r\n"
                         b"Content-Length: 100\r\n\r\n{")
    check_document(reply, "request_timeout")


def test_more_requests_at_once_than_allowed(tmp_path):
    """With --max-concurrent 1 the second is turned away while the body of the first is awaited."""
    with Service(tmp_path / "log.txt", "--max-concurrent", "1") as small:
        with socket.create_connection((small.host, small.port)) as first:
            first.sendall(b"POST /v1/transform HTTP/1.1\r\nHost: x\r\nContent-Type: application/json\r\n"
                          b"Content-Length: 100\r\n\r\n{")
            # Asked too early, this question would be the one that runs, and the first be turned away.
            time.sleep(0.3)
            reply = small.until(503, "GET", by_url(GOOD))
    check_document(reply, "overloaded")
    assert int(reply.headers["retry-after"]) >= 1
