"""Every returned vector lies within 1.01 u of its own exact length, in every regime.

u = 2⁻⁵³. The exact answer is that of the independent reference (mpmath, 1,300 digits) for the
doubles as they were sent; the error is the Euclidean length of (returned − exact) over that of
the exact vector, E' and B' apart. Below the smallest normal double no format can hold u; there each
component must be within half a subnormal spacing.
"""

import random

import pytest
from mpmath import mpf

import regimes
import ways
from reference import solve
from reference.algebra import norm

U = mpf(2) ** -53
PROMISE = 1.01
HALF_SUBNORMAL_SPACING = mpf(2) ** -1075

CASES = {name: (make, 250) for name, make in regimes.BOOSTS.items()} | ways.WAYS


def error(returned, exact):
    """The error of one vector in u; 0 where it is as close as subnormal numbers allow."""
    off = [mpf(a) - b for a, b in zip(returned, exact)]
    if all(abs(x) <= HALF_SUBNORMAL_SPACING for x in off):
        return 0.0
    length = norm(exact)
    return float(norm(off) / length / U) if length else float("inf")


@pytest.mark.parametrize("regime", CASES)
def test_each_vector_is_within_its_promise(service, report_error, regime):
    make, count = CASES[regime]
    rng = random.Random(f"accuracy {regime}")
    questions = [make(rng) for _ in range(count)]
    worst, at = 0.0, None
    for question, reply in zip(questions, service.post_all(questions)):
        assert reply.status == 200, f"{question}\n{reply.body.decode()}"
        exact = solve(question)
        for name in "eb":
            found = error(reply.json[name], getattr(exact, name))
            if found > worst:
                worst, at = found, (name, question, reply.json[name])
    report_error(regime, 2 * count, worst)
    assert worst <= PROMISE, f"{worst} u in {at[0]}\n{at[1]}\nreturned {at[2]}"


@pytest.mark.parametrize("regime", CASES)
def test_the_reference_agrees_with_itself(regime):
    """The textbook vector formulas and F' = ΛFΛᵀ share nothing; they agree far below u."""
    make, _ = CASES[regime]
    exact = solve(make(random.Random(f"reference {regime}")))
    for vector, other in zip(exact.si, exact.si_by_tensor):
        off = norm([a - b for a, b in zip(vector, other)])
        assert off <= norm(vector) * U**2


def test_overflow_is_refused_exactly_where_no_double_can_hold_the_answer(service):
    """Never Infinity, never a wrong number, and never a refusal of what fits."""
    rng = random.Random("overflow")
    questions = [regimes.past_the_largest(rng) for _ in range(200)]
    seen = set()
    for question, reply in zip(questions, service.post_all(questions)):
        exact = solve(question)
        # Rounds to the largest double below half of the next spacing, IEEE 754 § 4.3.1.
        fits = all(abs(x) < 2**1024 - mpf(2) ** 970 for x in exact.e + exact.b)
        seen.add(fits)
        if fits:
            assert reply.status == 200, reply.body.decode()
            assert max(error(reply.json[name], getattr(exact, name)) for name in "eb") <= PROMISE
        else:
            assert reply.status == 422
            assert {fault["code"] for fault in reply.json["errors"]} == {"overflow"}
    assert seen == {True, False}
