"""Simulated experiments with NumPy: how often the 95 % ellipsoids of an answer hold the truth.

Each experiment draws the errors of everything uncertain, restates the reading by the textbook formulas
(Jackson 11.149; Rodrigues) without any linearisation, and asks whether the result is within the
ellipsoid about the true one. Errors are Gaussian; an experiment whose speed would pass c counts as missed.
"""

import numpy as np

C = 299_792_458.0
# The 0.95 quantile of χ² with three degrees of freedom, by SciPy's chi2.ppf(0.95, 3).
CHI2 = 7.814727903251179


def coverage(question, answer, trials, rng):
    """The part of the experiments in which the ellipsoid of E and that of B held the truth."""
    e, cb, fine = restate(question, trials, rng)
    truth = restate(question, 1, None)
    covered = []
    for name, found, true in (("e", e, truth[0]), ("b", cb / C, truth[1] / C)):
        ellipsoid = answer["uncertainty"]["coverage"][name]
        along = (found - true) @ np.array(ellipsoid["directions"]).T
        with np.errstate(divide="ignore", invalid="ignore"):
            distance = np.sum((along / np.array(ellipsoid["half_axes"])) ** 2, axis=1)
        covered.append(float(np.mean(fine & (distance <= 1))))
    return covered


def moments(question, trials, rng):
    """Mean and covariance of (E', B') over experiments."""
    e, cb, fine = restate(question, trials, rng)
    assert fine.all()
    both = np.concatenate([e, cb / C], axis=1)
    return both.mean(axis=0), np.cov(both.T)


def errors(stated, size, trials, rng):
    """Draws of these standard uncertainties or this covariance; zeros without a generator."""
    if stated is None or rng is None:
        return np.zeros((trials, size))
    if isinstance(stated, dict):
        stated = stated["covariance"]
    stated = np.array(stated, dtype=float)
    if stated.ndim == 1:
        return rng.standard_normal((trials, size)) * stated
    values, vectors = np.linalg.eigh(stated)
    return rng.standard_normal((trials, size)) * np.sqrt(np.maximum(values, 0)) @ vectors.T


def restate(question, trials, rng):
    """E' and cB' in SI of each experiment, and whether its speeds are below c. Of a way of `steps` in SI."""
    stated = question.get("uncertainty", {})
    if "covariance" in stated:
        both = errors(stated["covariance"], 6, trials, rng)
    else:
        both = np.concatenate([errors(stated.get(name), 3, trials, rng) for name in "eb"], axis=1)
    e, cb = question["e"] + both[:, :3], (question["b"] + both[:, 3:]) * C
    fine = np.ones(trials, dtype=bool)
    for step in question["steps"]:
        ((kind, content),) = step.items()
        undo = content.get("inverse", False)
        if kind == "boost":
            beta = _beta(content, trials, rng)
            below = np.sum(beta**2, axis=1) < 1
            fine &= below
            beta[~below] = 0
            e, cb = _boost(-beta if undo else beta, e, cb)
        else:
            small = _turn(errors(content.get("uncertainty"), 3, trials, rng))
            exact = _turn(np.array([content["angle"] * np.array(content["axis"]) / np.linalg.norm(content["axis"])]))
            # Components: first by the stated axes, then by the further turn.
            whole = np.swapaxes(exact @ small, 1, 2)
            whole = np.swapaxes(whole, 1, 2) if undo else whole
            e, cb = (np.einsum("nij,nj->ni", whole, field) for field in (e, cb))
    return e, cb, fine


def _beta(content, trials, rng):
    stated = content.get("uncertainty")
    if "direction" in content:
        stated = stated or {}
        (name,) = content.keys() & {"beta", "gamma", "rapidity"}
        value = content[name] + errors([stated.get("value", 0.0)], 1, trials, rng)
        rapidity = {"beta": _artanh, "gamma": _arcosh, "rapidity": lambda x: x}[name](value)
        d = np.array(content["direction"]) / np.linalg.norm(content["direction"])
        about = errors([stated.get("direction", 0.0)] * 3, 3, trials, rng)
        about -= (about @ d)[:, None] * d
        turned = np.einsum("nij,j->ni", _turn(about), d)
        # A speed that no frame has: past c.
        return np.where(np.isnan(rapidity), 2.0, np.tanh(rapidity)) * turned
    if "beta" in content:
        return content["beta"] + errors(stated, 3, trials, rng)
    if "velocity" in content:
        return (content["velocity"] + errors(stated, 3, trials, rng)) / C
    stated = stated or {}
    omega, r = (content[name] + errors(stated.get(name), 3, trials, rng) for name in ("angular_velocity", "position"))
    return np.cross(omega, r) / C


def _artanh(x):
    return np.where(np.abs(x) < 1, np.arctanh(np.clip(x, -0.999999999, 0.999999999)), np.nan)


def _arcosh(x):
    return np.where(x >= 1, np.arccosh(np.maximum(x, 1)), np.nan)


def _turn(angles):
    """Rodrigues: the matrices R of turns by these vectors, n×3."""
    size = np.linalg.norm(angles, axis=1)
    n = angles / np.where(size == 0, 1, size)[:, None]
    k = np.zeros((len(angles), 3, 3))
    k[:, 0, 1], k[:, 0, 2], k[:, 1, 2] = -n[:, 2], n[:, 1], -n[:, 0]
    k -= np.swapaxes(k, 1, 2)
    sin, cos = np.sin(size)[:, None, None], np.cos(size)[:, None, None]
    return np.eye(3) + sin * k + (1 - cos) * k @ k


def _boost(beta, e, cb):
    gamma = 1 / np.sqrt(1 - np.sum(beta**2, axis=1))
    along = gamma**2 / (gamma + 1)

    def part(own, other, sign):
        first = own + sign * np.cross(beta, other)
        return gamma[:, None] * first - (along * np.sum(beta * own, axis=1))[:, None] * beta

    return part(e, cb, 1), part(cb, e, -1)
