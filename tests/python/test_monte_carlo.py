"""Trials, against as many by NumPy: the textbook transformation of each draw, in doubles.

Both are samples of one distribution, so they differ by statistical errors alone.
"""

import math

import numpy as np
import pytest

C = 299_792_458.0
TRIALS = 400_000


def boost(e, cb, beta):
    """Jackson, Classical Electrodynamics, 3rd ed., eq. 11.149, a row a trial."""
    gamma = 1 / np.sqrt(1 - np.sum(beta * beta, axis=1, keepdims=True))
    along = gamma**2 / (gamma + 1) * beta
    part = lambda f: np.sum(beta * f, axis=1, keepdims=True)
    return (gamma * (e + np.cross(beta, cb)) - along * part(e),
            gamma * (cb - np.cross(beta, e)) - along * part(cb))


def turn(axes, v):
    """Components on axes turned by the rotation vectors `axes` (Rodrigues' formula, backwards)."""
    angle = np.linalg.norm(axes, axis=1, keepdims=True)
    n = axes / np.where(angle == 0, 1, angle)
    along = n * np.sum(n * v, axis=1, keepdims=True)
    return along + (v - along) * np.cos(angle) - np.cross(n, v) * np.sin(angle)


def rows(rng, mean, sigma):
    return np.asarray(mean) + rng.standard_normal((TRIALS, 3)) * sigma


def tilted(rng, direction, sigma):
    """The direction turned by Gaussian angles about two axes across it."""
    n = np.asarray(direction) / np.linalg.norm(direction)
    across = np.linalg.svd(n[None, :])[2][1:]
    axes = rng.standard_normal((TRIALS, 2)) * sigma @ across
    return turn(-axes, np.broadcast_to(n, (TRIALS, 3)))


E, B = [12.5, 340.0, -3.75], [1200.0, -450.0, 44700.0]
READING = {"e": E, "b": B, "units": {"e": "mV/m", "b": "nT", "velocity": "km/s", "angle": "deg"},
           "uncertainty": {"e": [0.5, 0.1, 0.2], "b": [20, 5, 10]}}


def reading(rng):
    return rows(rng, E, [0.5, 0.1, 0.2]) * 1e-3, rows(rng, B, [20, 5, 10]) * 1e-9 * C


def slow(rng):
    e, cb = reading(rng)
    e, cb = (turn(np.tile([[0, 0, math.radians(30)]], (TRIALS, 1)), f) for f in (e, cb))
    wrong = np.radians(rng.standard_normal((TRIALS, 3)) * [0.1, 0.2, 0.5])
    e, cb = turn(wrong, e), turn(wrong, cb)
    return boost(e, cb, rows(rng, [7600, 1000, -500], [10, 20, 30]) / C)


def backwards(rng):
    e, cb = reading(rng)
    wrong = np.radians(rng.standard_normal((TRIALS, 3)) * [0.1, 0.2, 0.5])
    e, cb = turn(-wrong, e), turn(-wrong, cb)
    e, cb = (turn(np.tile([[0, 0, -math.radians(30)]], (TRIALS, 1)), f) for f in (e, cb))
    return boost(e, cb, -rows(rng, [7600, 1000, -500], [10, 20, 30]) / C)


def fast(rng):
    e, cb = reading(rng)
    return boost(e, cb, rows(rng, [0.5, 0.3, -0.2], [0.02, 0.01, 0.03]))


def beam(rng):
    e, cb = reading(rng)
    gamma = 5 + 0.3 * rng.standard_normal((TRIALS, 1))
    return boost(e, cb, tilted(rng, [1, 2, -1], 0.05) * np.sqrt(1 - 1 / gamma**2))


def turning(rng):
    e, cb = reading(rng)
    v = np.cross(rows(rng, [0, 10, 3000], [1, 2, 30]), rows(rng, [0.2, 0, 0.1], [0.001, 0.002, 0.003]))
    return boost(e, cb, v / C)


def rapid(rng):
    e, cb = reading(rng)
    eta = -1.5 + 0.2 * rng.standard_normal((TRIALS, 1))
    return boost(e, cb, tilted(rng, [0, 0, 1], 0.1) * np.tanh(eta))


ROTATE = {"axis": [0, 0, 1], "angle": 30, "uncertainty": [0.1, 0.2, 0.5]}
VELOCITY = {"velocity": [7.6, 1.0, -0.5], "uncertainty": [0.01, 0.02, 0.03]}
CASES = {
    "turn, then boost": (slow, {"steps": [{"rotate": ROTATE}, {"boost": VELOCITY}]}),
    "the same, each backwards": (backwards, {"steps": [{"rotate": ROTATE | {"inverse": True}},
                                                       {"boost": VELOCITY | {"inverse": True}}]}),
    "beta": (fast, {"boost": {"beta": [0.5, 0.3, -0.2], "uncertainty": [0.02, 0.01, 0.03]}}),
    "gamma": (beam, {"boost": {"direction": [1, 2, -1], "gamma": 5,
                               "uncertainty": {"value": 0.3, "direction": math.degrees(0.05)}}}),
    "rapidity": (rapid, {"boost": {"direction": [0, 0, 1], "rapidity": -1.5,
                                   "uncertainty": {"value": 0.2, "direction": math.degrees(0.1)}}}),
    "turning body": (turning, {"boost": {"angular_velocity": [0, 10, 3000], "position": [0.2, 0, 0.1],
                                         "uncertainty": {"angular_velocity": [1, 2, 30],
                                                         "position": [0.001, 0.002, 0.003]}}}),
}


def shortest(sample):
    """The ends of the shortest interval of 95 %."""
    ordered = np.sort(sample)
    q = round(0.95 * len(ordered))
    start = np.argmin(ordered[q:] - ordered[:-q])
    return ordered[start], ordered[start + q]


@pytest.mark.parametrize("case", CASES)
def test_trials_are_those_of_numpy(service, case):
    draw, way = CASES[case]
    question = READING | way | {"monte_carlo": {"trials": TRIALS, "seed": 11}}
    reply = service.post(question)
    assert reply.status == 200, reply.body
    found = reply.json["monte_carlo"]
    assert found["refused"] == 0
    e, cb = draw(np.random.default_rng(17))
    drawn = np.hstack([e * 1e3, cb / C * 1e9])
    sigma = drawn.std(axis=0, ddof=1)
    # Differences of two samples of N: √2 of the statistical error of one; five of them are allowed.
    far = 5 * math.sqrt(2 / TRIALS)
    mean = np.array(found["estimate"]["e"] + found["estimate"]["b"])
    assert np.all(np.abs(mean - drawn.mean(axis=0)) < far * sigma)
    # The error of a product's mean, from its own spread.
    centred = (drawn - drawn.mean(axis=0)) / sigma
    products = centred[:, :, None] * centred[:, None, :]
    covariance = np.array(found["covariance"]) / sigma[:, None] / sigma[None, :]
    assert np.all(np.abs(covariance - products.mean(axis=0)) < far * products.std(axis=0))
    given = found["standard_uncertainty"]
    assert np.allclose(np.array(given["e"] + given["b"]) ** 2, np.diag(found["covariance"]), rtol=1e-12)
    intervals = found["intervals"]["e"] + found["intervals"]["b"]
    for sample, (low, high), size in zip(drawn.T, intervals, sigma):
        inside = np.mean((low <= sample) & (sample <= high))
        assert abs(inside - 0.95) < far * math.sqrt(0.95 * 0.05) + 0.001
        ends = shortest(sample)
        # The place of the shortest interval is known less well than its length.
        assert abs((high - low) - (ends[1] - ends[0])) < 0.02 * size
        assert abs(low - ends[0]) < 0.15 * size


def test_the_same_question_has_the_same_answer(service):
    question = READING | CASES["beta"][1] | {"monte_carlo": {"trials": 50_000, "seed": 5}}
    first, second = service.post(question), service.post(question)
    assert first.body == second.body
    other = service.post(question | {"monte_carlo": {"trials": 50_000, "seed": 6}})
    assert other.json["monte_carlo"]["estimate"] != first.json["monte_carlo"]["estimate"]


def test_the_service_counts_its_trials(service):
    def counted():
        text = service.get("/metrics").body.decode()
        (line,) = [line for line in text.splitlines() if line.startswith("lodeframe_trials_total")]
        return float(line.split()[-1])

    before = counted()
    service.post(READING | CASES["beta"][1] | {"monte_carlo": {"trials": 30_000}})
    assert counted() - before == 30_000
