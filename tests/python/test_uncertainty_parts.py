"""What an answer says beside its covariance, against PyPI `uncertainties`, NumPy and SciPy, and JCGM 102:2011.

`uncertainties` propagates to first order through any arithmetic, by its own derivatives; the formulas here
are the textbook ones (Jackson 11.149).
"""

import json
import random

import numpy as np
import pytest
from scipy.stats import chi2
from uncertainties import correlated_values, covariance_matrix, ufloat, umath

import simulate
import uncertain

C = 299_792_458.0


def dot(a, b):
    return sum(x * y for x, y in zip(a, b))


def cross(a, b):
    return [a[i - 2] * b[i - 1] - a[i - 1] * b[i - 2] for i in range(3)]


def norm(a):
    return umath.sqrt(dot(a, a))


def boosted(beta, e, cb):
    """Jackson 11.149."""
    gamma = 1 / umath.sqrt(1 - dot(beta, beta))
    along = gamma**2 / (gamma + 1)

    def part(own, other, sign):
        return [gamma * (x + sign * y) - along * dot(beta, own) * b
                for x, y, b in zip(own, cross(beta, other), beta)]

    return part(e, cb, 1), part(cb, e, -1)


def values(means, stated):
    """Numbers with the uncertainty that a question states of them."""
    if isinstance(stated, dict):
        stated = stated["covariance"]
    if isinstance(stated[0], list):
        return list(correlated_values(means, stated))
    return [ufloat(x, sigma) for x, sigma in zip(means, stated)]


def propagated(question):
    """(E, cB, E', cB') with their uncertainties."""
    stated = question["uncertainty"]
    if "covariance" in stated:
        both = values(question["e"] + question["b"], stated["covariance"])
        e, b = both[:3], both[3:]
    else:
        e, b = values(question["e"], stated["e"]), values(question["b"], stated["b"])
    cb = [C * x for x in b]
    boost = question["steps"][0]["boost"]
    after = boosted(values(boost["beta"], boost["uncertainty"]), e, cb)
    rotate = question["steps"][1]["rotate"]
    n = np.array(rotate["axis"]) / np.linalg.norm(rotate["axis"])
    small = values([0.0] * 3, rotate["uncertainty"])
    turned = []
    for vector in after:
        along = dot(n, vector)
        # Components on turned axes: Rodrigues with the angle reversed.
        stated_axes = [x * np.cos(rotate["angle"]) - y * np.sin(rotate["angle"]) + k * along * (1 - np.cos(rotate["angle"]))
                       for x, y, k in zip(vector, cross(n, vector), n)]
        # The true next axes are these turned further.
        turned.append([x - y for x, y in zip(stated_axes, cross(small, stated_axes))])
    return e, cb, *turned


@pytest.fixture(scope="module")
def cases(service):
    """Questions of a boost and a rotation, their answers, and the same by `uncertainties`."""
    rng = random.Random("parts")
    questions = []
    while len(questions) < 25:
        name, question = uncertain.experiment(rng)
        if name == "boost and rotation":
            questions.append(question | {"include": ["budget", "parallel_frame"]})
    return [(question, reply.json, propagated(question))
            for question, reply in zip(questions, service.post_all(questions))]


def close(found, expected, limit=1e-9):
    return abs(found - expected) <= limit * abs(expected)


def test_the_covariance(cases):
    for _, answer, (_, _, e, cb) in cases:
        expected = np.array(covariance_matrix([*e, *(x / C for x in cb)]))
        sigma = np.sqrt(np.diag(expected))
        found = np.array(answer["uncertainty"]["covariance"])
        assert np.max(np.abs(found - expected) / np.outer(sigma, sigma)) < 1e-9
        assert np.allclose(answer["uncertainty"]["e"] + answer["uncertainty"]["b"], sigma, rtol=1e-9, atol=0)
        correlation = np.array(answer["uncertainty"]["correlation"])
        assert np.allclose(correlation, expected / np.outer(sigma, sigma), rtol=0, atol=1e-9)


def test_lengths_and_angle(cases):
    for _, answer, (_, _, e, cb) in cases:
        angle = umath.acos(dot(e, cb) / norm(e) / norm(cb))
        for name, expected in (("e", norm(e)), ("b", norm(cb) / C), ("angle", angle)):
            found = answer["uncertainty"]["magnitudes"][name]
            assert close(found["value"], expected.nominal_value)
            assert close(found["uncertainty"], expected.std_dev, 1e-7)


def test_invariants_and_the_speed_of_the_parallel_frame(cases):
    for _, answer, (e0, cb0, e, cb) in cases:
        stated = answer["uncertainty"]
        assert close(stated["invariants"]["e2_minus_c2b2"], (dot(e0, e0) - dot(cb0, cb0)).std_dev)
        assert close(stated["invariants"]["e_dot_cb"], dot(e0, cb0).std_dev)
        s, u = norm(cross(e, cb)), dot(e, e) + dot(cb, cb)
        beta = 2 * s / (u + umath.sqrt(u**2 - 4 * s**2))
        assert close(answer["parallel_frame"]["beta"], beta.nominal_value)
        assert close(stated["parallel_frame"]["beta"], beta.std_dev, 1e-7)


def test_the_budget_adds_up_and_names_its_sources(cases):
    for question, answer, (e0, cb0, e, cb) in cases:
        correlated = "covariance" in question["uncertainty"]
        for name, vector in (("e", e), ("b", cb)):
            for shares, component in zip(answer["uncertainty"]["budget"][name], vector):
                found = {entry["source"]: entry["share"] for entry in shares}
                assert sum(found.values()) == pytest.approx(1, abs=1e-10)
                assert [abs(entry["share"]) for entry in shares] == sorted(map(abs, found.values()), reverse=True)
                assert ("/uncertainty/covariance" in found) <= correlated
                if correlated:
                    continue
                by_variable = component.error_components()
                for source, read in (("/e", e0), ("/b", cb0)):
                    variables = {variable for x in read for variable in x.derivatives}
                    part = sum(error**2 for variable, error in by_variable.items() if variable in variables)
                    assert found.get(source, 0) == pytest.approx(part / component.std_dev**2, rel=1e-9, abs=1e-11)


def test_the_ellipsoid(cases):
    """Half axes and directions are those of NumPy's eigenvalues, k² a quantile of χ² (SciPy)."""
    for _, answer, _ in cases:
        coverage = answer["uncertainty"]["coverage"]
        assert coverage["probability"] == 0.95
        assert close(coverage["factor"] ** 2, chi2.ppf(0.95, 3), 1e-14)
        # JCGM 102:2011, table 1 (from memory): 2.80 for three output quantities.
        assert round(coverage["factor"], 2) == 2.80
        covariance = np.array(answer["uncertainty"]["covariance"])
        for name, offset in (("e", 0), ("b", 3)):
            block = covariance[offset:offset + 3, offset:offset + 3]
            axes = np.array(coverage[name]["directions"])
            assert np.allclose(axes @ axes.T, np.eye(3), atol=1e-14)
            lengths = np.array(coverage[name]["half_axes"]) / coverage["factor"]
            assert list(lengths) == sorted(lengths, reverse=True)
            scale = np.max(np.abs(block))
            assert np.allclose(axes.T @ np.diag(lengths**2) @ axes / scale, block / scale, atol=1e-13)


def test_a_monte_carlo_of_numpy_agrees_where_linear(cases):
    rng = np.random.default_rng(5)
    tried = 0
    for question, answer, _ in cases:
        if answer["uncertainty"]["second_order"]["ratio"] > 0.03:
            continue
        _, found = simulate.moments(question, 100_000, rng)
        expected = np.array(answer["uncertainty"]["covariance"])
        sigma = np.sqrt(np.diag(expected))
        assert np.max(np.abs(found - expected) / np.outer(sigma, sigma)) < 0.02
        tried += 1
    assert tried >= 5


def test_coverage_where_the_verdict_is_linear(service):
    """Over experiments without linearisation; tests/bench/coverage.py does many more."""
    rng = random.Random("coverage")
    experiments = [uncertain.experiment(rng) for _ in range(120)]
    replies = service.post_all([question for _, question in experiments])
    seen = {True: 0, False: 0}
    for i, ((_, question), reply) in enumerate(zip(experiments, replies)):
        linear = reply.json["uncertainty"]["linear"]
        seen[linear] += 1
        told = {notice["code"] for notice in reply.json["notices"]}
        assert ("not_linear" in told) is not linear
        if linear:
            found = simulate.coverage(question, reply.json, 20_000, np.random.default_rng(i))
            assert 0.94 <= min(found) and max(found) <= 0.96, question
    assert min(seen.values()) > 20


@pytest.mark.parametrize("sigma, expected", [
    ([1, 1, 1], [[2, 1], [1, 2]]),
    ([1, 1, 3], [[10, 9], [9, 10]]),
])
def test_the_additive_model_of_jcgm_102(start, sigma, expected):
    """JCGM 102:2011, 9.2 (from memory): Y₁ = X₁ + X₃, Y₂ = X₂ + X₃, here as the matrix of a sensor."""
    service = start('epoch = "T0"\n[frames.ground]\n[frames.probe]\nparent = "ground"\n'
                    "sensor.e = { matrix = [[1, 0, 1], [0, 1, 1], [0, 0, 1]] }\n")
    answer = service.post({"e": [0, 0, 0], "from": "probe", "to": "ground", "uncertainty": {"e": sigma}}).json
    assert [row[:2] for row in answer["uncertainty"]["covariance"][:2]] == expected


def test_a_calibrated_two_axis_sensor(start):
    """Gain, offset and raw numbers, with the third component from E·B = 0."""
    matrix, offset = [[500.0, -1.5, 0], [2.0, 495.0, 0], [0, 0, 1]], [0.021, -0.013, 0]
    of_matrix, of_offset = [[2.0, 0.3, 0], [0.4, 2.5, 0], [0, 0, 0]], [0.001, 0.002, 0]
    service = start('epoch = "T0"\n[units]\ne = "mV/m"\nb = "nT"\n[frames.ground]\n[frames.boom]\nparent = "ground"\n'
                    f'sensor.e = {{ axes = ["x", "y"], matrix = {matrix}, offset = {offset}, '
                    f"uncertainty = {{ matrix = {of_matrix}, offset = {of_offset} }} }}\n")
    raw, b = [0.31, -0.12], [1200.0, -450.0, 44700.0]
    answer = service.post({
        "e": [*raw, None], "b": b, "units": {"b": "nT"}, "from": "boom", "to": "ground",
        "assume": {"e_dot_b_zero": {}}, "include": ["budget"],
        "uncertainty": {"e": [0.002, 0.003, None], "b": [20, 30, 40]}}).json
    gains = [[ufloat(matrix[i][j], of_matrix[i][j]) for j in range(2)] for i in range(2)]
    net = [ufloat(raw[i], (0.002, 0.003)[i]) - ufloat(offset[i], of_offset[i]) for i in range(2)]
    e = [dot(row, net) for row in gains]
    b = [ufloat(x, sigma) for x, sigma in zip(b, (20, 30, 40))]
    e.append(-(e[0] * b[0] + e[1] * b[1]) / b[2])
    expected = np.array(covariance_matrix(e + b))
    sigma = np.sqrt(np.diag(expected))
    found = np.array(answer["uncertainty"]["covariance"])
    assert np.max(np.abs(found - expected) / np.outer(sigma, sigma)) < 1e-12
    sources = {share["source"] for share in answer["uncertainty"]["budget"]["e"][0]}
    assert sources == {"/e", "/frames/boom/sensor/e"}


def test_a_track_and_a_turning_frame(start):
    """Their errors, as those of the steps they amount to; of a turn by its derivatives in ω."""
    service = start(
        'epoch = "T0"\n[units]\nvelocity = "km/s"\nangle = "deg"\nangular_velocity = "deg/s"\n[frames.ground]\n'
        '[frames.craft]\nparent = "ground"\ntrack = "track.csv"\n[frames.rotor]\nparent = "ground"\n'
        "turning = { angular_velocity = [1, 2, 20], epoch = 0, phase = 5, "
        "uncertainty = { angular_velocity = [0.02, 0.03, 0.05], phase = 0.1 } }\n",
        track="time,vx,vy,vz,qw,qx,qy,qz,u_vx,u_vy,u_vz,u_rx,u_ry,u_rz\n"
              "0,7.6,0.1,-0.3,0.9238795,0,0,0.3826834,0.01,0.02,0.03,0.1,0.2,0.3\n"
              "10,7.5,0.1,-0.3,0.9238795,0,0,0.3826834,0.01,0.02,0.03,0.1,0.2,0.3\n")
    field = {"e": [1e-3, 2e-3, -3e-3], "b": [1e-5, -2e-5, 4e-5],
             "units": {"velocity": "km/s", "angle": "deg"}, "include": ["budget"]}
    named = service.post(field | {"from": "ground", "to": "craft", "time": 0}).json["uncertainty"]
    steps = service.post(field | {"steps": [
        {"boost": {"velocity": [7.6, 0.1, -0.3], "uncertainty": [0.01, 0.02, 0.03]}},
        {"rotate": {"quaternion": {"w": 0.9238795, "x": 0, "y": 0, "z": 0.3826834}, "uncertainty": [0.1, 0.2, 0.3]}},
    ]}).json["uncertainty"]
    assert named["covariance"] == steps["covariance"]
    assert {share["source"] for share in named["budget"]["e"][0]} == {"/frames/craft/track"}

    turned = service.post(field | {"from": "ground", "to": "rotor", "time": 3.5}).json["uncertainty"]
    degree = np.pi / 180
    omega = [ufloat(x * degree, s * degree) for x, s in zip((1, 2, 20), (0.02, 0.03, 0.05))]
    angle = norm(omega) * 3.5 + ufloat(5, 0.1) * degree
    n = [x / norm(omega) for x in omega]
    after = []
    for vector in (field["e"], field["b"]):
        after += [x * umath.cos(angle) - y * umath.sin(angle) + k * dot(n, vector) * (1 - umath.cos(angle))
                  for x, y, k in zip(vector, cross(n, vector), n)]
    expected = np.array(covariance_matrix(after))
    sigma = np.sqrt(np.diag(expected))
    assert np.max(np.abs(np.array(turned["covariance"]) - expected) / np.outer(sigma, sigma)) < 1e-12


def test_what_depends_on_something_missing_is_null(service):
    """A turn about x mixes the missing z into y, but not into x; a boost along x mixes B into Ey and Ez."""
    rotation = {"axis": [0, 0, 1], "angle": 0.5, "uncertainty": [0, 0, 0.1]}
    about_z = service.post({"e": [1, 2, None], "rotation": rotation, "uncertainty": {"e": [0.1, 0.1, None]}}).json
    assert None not in about_z["uncertainty"]["e"][:2] and about_z["uncertainty"]["e"][2] is None
    about_x = service.post({"e": [1, 2, None], "rotation": rotation | {"uncertainty": [0.1, 0, 0]},
                            "uncertainty": {"e": [0.1, 0.1, None]}}).json
    assert None not in about_x["e"][:2]
    assert about_x["uncertainty"]["e"][0] is not None and about_x["uncertainty"]["e"][1] is None
    assert about_x["uncertainty"]["coverage"]["e"] is None and about_x["uncertainty"]["invariants"] is None
    along_x = service.post({"e": [1, None, None], "velocity": [1e4, 0, 0],
                            "uncertainty": {"e": [0.1, 0, 0], "velocity": [1, 0, 0]}}).json
    assert along_x["uncertainty"]["e"] == [0.1, None, None]
    across = service.post({"e": [1, None, None], "velocity": [1e4, 0, 0],
                           "uncertainty": {"e": [0.1, 0, 0], "velocity": [1, 1, 0]}}).json
    assert across["e"][0] == 1 and across["uncertainty"]["e"] == [None] * 3


def test_by_url_and_by_body_are_one(service):
    question = {"e": [0, 1.2, 0], "b": [0, 0, 4.5e-5], "boost": {"direction": [1, 0, 0], "rapidity": 0.5},
                "uncertainty": {"e": [0.1, 0.1, 0.1], "boost": {"value": 0.01, "direction": 0.02}},
                "include": ["budget"]}
    url = ("/v1/transform?e=0,1.2,0&b=0,0,4.5e-5&boost.direction=1,0,0&boost.rapidity=0.5&uncertainty.e=.1,.1,.1"
           "&uncertainty.boost.value=0.01&uncertainty.boost.direction=0.02&include=budget")
    assert service.post(question).json == service.get(url).json
    matrix = [[1e-2 if i == j else 1e-4 for j in range(6)] for i in range(6)]
    question["uncertainty"] = {"covariance": matrix}
    url = url[:url.index("&uncertainty")] + "&include=budget&uncertainty.covariance=" + json.dumps(matrix).replace(" ", "")
    assert service.post(question).json == service.get(url).json


def test_remarks(service):
    def codes(**question):
        return {notice["code"] for notice in service.post({"e": [1, 2, 3], "b": [0, 0, 1e-8], **question}).json["notices"]}

    still = {"velocity": [0, 0, 0]}
    assert codes(**still) == set()
    assert codes(**still, uncertainty={"e": [5, 0, 0]}) == {"uncertainty_exceeds_value"}
    # Three signs that cannot hold together, off by 2e-7.
    slightly = [[1, -0.5000001, -0.5000001], [-0.5000001, 1, -0.5000001], [-0.5000001, -0.5000001, 1]]
    assert codes(**still, uncertainty={"e": {"covariance": slightly}}) == {"covariance_mended"}
    fast = {"boost": {"beta": [0.99, 0, 0], "uncertainty": [0.01, 0, 0]}}
    assert "not_linear" in codes(**fast, uncertainty={"e": [0.1, 0.1, 0.1], "b": [1e-9] * 3})
    huge = {"boost": {"direction": [1, 0, 0], "rapidity": 600}, "uncertainty": {"e": [1, 1, 1]}}
    assert "uncertainty_out_of_range" in codes(**huge)
    assert service.post({"e": [1, 2, 3], "b": [0, 0, 1], "velocity": [1, 0, 0]}).json.get("uncertainty") is None
