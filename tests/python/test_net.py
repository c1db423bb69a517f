"""What comes beside E' and B': net transformation, Λ, tensor, energy, invariants, parallel frame.

Checked against the reference over random chains: single numbers to a few u, vectors and matrices
against the size of the whole.
"""

import random

import pytest
from mpmath import mp, mpf

import ways
from reference import solve
from reference.algebra import dot, norm, scale
from reference.boost import gamma_of
from reference.units import C

EVERYTHING = ["tensor", "matrix", "energy", "parallel_frame"]
CLOSE = 8 * mpf(2) ** -53


def flat(value):
    return [x for item in value for x in flat(item)] if isinstance(value, list) else [mpf(value)]


def assert_close(returned, exact, within=CLOSE):
    """Equal to within `within` of the length of the whole."""
    returned, exact = flat(returned), flat(exact)
    off = norm([a - b for a, b in zip(returned, exact, strict=True)])
    assert off <= within * norm(exact), f"{returned}\n{[float(x) for x in exact]}"


@pytest.fixture(scope="module")
def pairs(service):
    """Answers to 200 random chains in SI units, each with its exact answer."""
    rng = random.Random("net")
    questions = [ways.chain(rng) | {"include": EVERYTHING} for _ in range(200)]
    return [(service.ask(question), solve(question)) for question in questions]


def test_the_net_boost(pairs):
    for answer, exact in pairs:
        net = answer["net"]
        assert_close(net["beta"], exact.beta)
        assert_close(net["velocity"], scale(mpf(C), exact.beta))
        assert_close(net["gamma"], exact.gamma)
        assert_close(net["rapidity"], mp.atanh(norm(exact.beta)))


def test_the_net_rotation_has_a_scalar_part_that_is_not_negative(pairs):
    for answer, exact in pairs:
        q = [answer["net"]["rotation"][name] for name in "wxyz"]
        assert q[0] >= 0
        assert_close(q, exact.quaternion)


def test_the_net_matrix(pairs):
    for answer, exact in pairs:
        assert_close(answer["matrix"], exact.matrix)


def test_the_tensor_in_both_index_positions_and_its_dual(pairs):
    for answer, exact in pairs:
        for name, value in zip(("contravariant", "covariant", "dual"), exact.tensors):
            assert_close(answer["tensor"][name], value)
        assert answer["tensor"]["signature"] == "mostly_minus"


def test_mostly_plus_flips_the_sign_of_all_three(service):
    question = {"e": [1, 2, 3], "b": [4e-9, 5e-9, 6e-9], "velocity": [1e8, 0, 0], "include": ["tensor"]}
    minus = service.ask(question)["tensor"]
    plus = service.ask(question | {"signature": "mostly_plus"})["tensor"]
    assert plus["signature"] == "mostly_plus"
    for name in ("contravariant", "covariant", "dual"):
        assert flat(plus[name]) == [-x for x in flat(minus[name])]


def test_energy_and_stress_of_the_answer(pairs, constants):
    for answer, exact in pairs:
        density, poynting, stress = exact.energy(constants["magnetic_constant"])
        assert_close(answer["energy"]["density"], density)
        assert_close(answer["energy"]["stress"], stress)
        # The Poynting vector may be small against c·u where E and B are nearly parallel.
        off = norm([mpf(a) - b for a, b in zip(answer["energy"]["poynting"], poynting)])
        assert off <= CLOSE * C * density


def test_invariants_of_the_question(pairs):
    for answer, exact in pairs:
        for name, value in zip(("e2_minus_c2b2", "e_dot_cb"), exact.invariants):
            assert_close(answer["invariants"][name], value)
        assert answer["invariants"]["residual"] < 1e-14


def test_the_parallel_frame_of_the_answer(pairs):
    """E there is reported as a length, B with the sign of E·B."""
    for answer, exact in pairs:
        beta, e, cb = exact.parallel
        frame = answer["parallel_frame"]
        assert frame["exists"] is True
        assert_close(frame["beta"], norm(beta))
        assert_close(frame["velocity"], scale(mpf(C), beta))
        assert_close(frame["direction"], scale(1 / norm(beta), beta))
        assert_close(frame["gamma"], gamma_of(beta))
        assert_close(frame["rapidity"], mp.atanh(norm(beta)))
        assert_close(frame["e_parallel"], norm(e))
        assert_close(frame["b_parallel"], mp.sign(dot(e, cb)) * norm(cb) / C)


def test_a_null_field_has_no_parallel_frame(service):
    wave = {"e": [0, 299792458, 0], "b": [0, 0, 1], "velocity": [0, 0, 0], "include": ["parallel_frame"]}
    answer = service.ask(wave)
    assert answer["parallel_frame"]["exists"] is False and answer["parallel_frame"]["why"]
    assert answer["invariants"]["kind"] == "null"


@pytest.mark.parametrize("e, b, kind", [
    ([1, 0, 0], [0, 0, 0], "electric"),
    ([0, 0, 0], [1, 0, 0], "magnetic"),
    ([299792458, 0, 0], [1, 0, 0], "balanced"),
    ([0, 0, 0], [0, 0, 0], "zero"),
])
def test_the_kind_of_a_field(service, e, b, kind):
    assert service.ask({"e": e, "b": b, "velocity": [1e8, 0, 0]})["invariants"]["kind"] == kind
