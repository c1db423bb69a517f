"""Random uncertainties beside the random questions of regimes.py and ways.py."""

import math

from regimes import power


def vector(rng, size):
    """Standard uncertainties or a full covariance of a vector, about 1e-6 to 0.1 of `size`."""
    sigma = [size * power(rng, -6, -1) for _ in range(3)]
    if not 1e-130 < size < 1e150 or rng.random() < 0.5:
        return sigma
    return {"covariance": covariance(rng, sigma)}


def covariance(rng, sigma):
    """A covariance of these standard uncertainties, correlated at random."""
    assert all(1e-140 < s < 1e150 for s in sigma), "their squares are no doubles"
    n = len(sigma)
    rows = [[rng.gauss(0, 1) for _ in range(n)] for _ in range(n)]
    lengths = [math.hypot(*row) for row in rows]
    matrix = [[0.0] * n for _ in range(n)]
    for i in range(n):
        for j in range(i, n):
            r = 1.0 if i == j else math.fsum(a * b for a, b in zip(rows[i], rows[j])) / lengths[i] / lengths[j]
            matrix[i][j] = matrix[j][i] = r * sigma[i] * sigma[j]
    return matrix


def size(vector):
    return max(abs(x) for x in vector) or 1.0


def of_boost(rng, boost):
    if "direction" in boost:
        if "gamma" in boost:
            value = (boost["gamma"] - 1) * power(rng, -6, -1)
        else:
            (name,) = boost.keys() & {"beta", "rapidity", "kinetic_energy"}
            value = abs(boost[name]) * power(rng, -6, -1)
        return rng.choice([{"value": value, "direction": power(rng, -6, -1)}, {"value": value},
                           {"direction": power(rng, -6, -1)}])
    if "angular_velocity" in boost:
        return {name: vector(rng, size(boost[name])) for name in ("angular_velocity", "position")}
    return vector(rng, size(boost["velocity" if "velocity" in boost else "beta"]))


def of_step(rng, step):
    """The step with an uncertainty of its own, or at times without."""
    ((kind, content),) = step.items()
    if rng.random() < 0.2:
        return step
    content = content | {"uncertainty": of_boost(rng, content) if kind == "boost" else vector(rng, 0.1)}
    return {kind: content}


def of_question(rng, question):
    """The question with uncertainties of its reading and of its way."""
    stated = {}
    e, b = size(question["e"]), size(question["b"])
    kind = rng.randrange(4)
    if kind == 0 and 1e-130 < min(e, b) and max(e, b) < 1e150:
        sigma = [s * power(rng, -6, -1) for s in 3 * [e] + 3 * [b]]
        stated["covariance"] = covariance(rng, sigma)
    else:
        stated["e"] = vector(rng, e)
    if kind == 1:
        stated["b"] = vector(rng, b)
    question = dict(question)
    if "steps" in question:
        question["steps"] = [of_step(rng, step) for step in question["steps"]]
    elif "velocity" in question:
        stated["velocity"] = vector(rng, size(question["velocity"]))
    elif "boost" in question and rng.random() < 0.5:
        question["boost"] = question["boost"] | {"uncertainty": of_boost(rng, question["boost"])}
    elif "boost" in question:
        stated["boost"] = of_boost(rng, question["boost"])
    elif rng.random() < 0.5:
        question["rotation"] = question["rotation"] | {"uncertainty": vector(rng, 0.1)}
    else:
        stated["rotation"] = vector(rng, 0.1)
    return question | {"uncertainty": stated}
