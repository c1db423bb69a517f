"""The law of propagation, against differences of an independent reference in every regime.

Each element of the covariance of an answer is within 1e-12 √(Cᵢᵢ Cⱼⱼ) of the exact one for the doubles
received.
"""

import random

import pytest
from mpmath import mp, mpf

import regimes
import uncertain
import ways
from reference.uncertainty import propagate

LIMIT = 1e-12
LARGEST = mpf(2) ** 1024
# Below it a double has too few digits left.
SMALLEST = mpf(2) ** -960

CASES = {name: (make, 12) for name, make in regimes.BOOSTS.items()} | {
    name: (make, {"chain of 300 or 1,000 steps": 1, "up and down, 999 steps": 1}.get(name, 10))
    for name, (make, _) in ways.WAYS.items()
}


def departure(reply, exact):
    """The largest |ΔCᵢⱼ|/√(Cᵢᵢ Cⱼⱼ), also of the standard uncertainties and the correlation."""
    stated = reply["uncertainty"]
    sigma = [mp.sqrt(exact[i][i]) for i in range(6)]
    worst = mpf(0)
    for i in range(6):
        returned = (stated["e"] + stated["b"])[i]
        if sigma[i] >= LARGEST:
            assert returned is None
        elif sigma[i] > SMALLEST or sigma[i] == 0:
            worst = max(worst, abs(returned - sigma[i]) / (sigma[i] or 1))
        for j in range(6):
            size = sigma[i] * sigma[j]
            if size == 0:
                assert stated["covariance"][i][j] == 0
                continue
            worst = max(worst, abs(stated["correlation"][i][j] - exact[i][j] / size))
            if abs(exact[i][j]) >= LARGEST:
                assert stated["covariance"][i][j] is None
            elif size > SMALLEST:
                worst = max(worst, abs(stated["covariance"][i][j] - exact[i][j]) / size)
    return worst


@pytest.mark.parametrize("regime", CASES)
def test_the_covariance_is_the_exact_one(service, report_error, regime):
    make, count = CASES[regime]
    rng = random.Random(f"uncertainty {regime}")
    questions = [uncertain.of_question(rng, make(rng)) for _ in range(count)]
    worst, at = mpf(0), None
    for question, reply in zip(questions, service.post_all(questions)):
        assert reply.status == 200, f"{question}\n{reply.body.decode()}"
        exact, invariants = propagate(question)
        found = departure(reply.json, exact)
        for name, variance in zip(("e2_minus_c2b2", "e_dot_cb"), invariants):
            returned = reply.json["uncertainty"]["invariants"][name]
            sigma = mp.sqrt(variance)
            if SMALLEST < sigma < LARGEST:
                found = max(found, abs(returned - sigma) / sigma)
        if found > worst:
            worst, at = found, question
    report_error(regime, count, float(worst / mpf(2) ** -53))
    assert worst <= LIMIT, f"{float(worst)} in\n{at}"
