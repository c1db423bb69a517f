"""Random uncertainties beside the random questions of regimes.py and ways.py."""

import math

import regimes
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
        steps = question["steps"]
        # Each of its numbers takes the reference two whole ways: a second each where they are long.
        uncertain = range(len(steps)) if len(steps) <= 12 else [rng.randrange(len(steps))]
        question["steps"] = [of_step(rng, step) if i in uncertain else step for i, step in enumerate(steps)]
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


def experiment(rng):
    """A name and a question with errors from negligible to far too large for first order."""
    name = rng.choice([*EXPERIMENTS])
    e = power(rng, -3, 6)
    question = {"e": regimes.vector(rng, e * power(rng, -2, 2)), "b": regimes.vector(rng, e / regimes.C)}
    size = power(rng, -4, 0)
    steps = EXPERIMENTS[name](rng, size)
    if name == "E next to -v x B":
        beta = steps[0]["boost"]["beta"]
        question["e"] = [-regimes.C * x * (1 + size * rng.gauss(0, 1)) for x in regimes.cross(beta, question["b"])]
    # Of the reading: some of it exact, but not all of it.
    share = power(rng, -4, -0.5)
    sigma = [share * math.hypot(*question["e"]) * power(rng, -1, 0) for _ in range(3)]
    sigma += [share * math.hypot(*question["b"]) * power(rng, -1, 0) for _ in range(3)]
    if rng.random() < 0.5:
        stated = {"e": sigma[:3], "b": sigma[3:]}
    else:
        stated = {"covariance": covariance(rng, sigma)}
    return name, question | {"steps": steps, "uncertainty": stated}


def _moving(rng, size, low, high):
    """A velocity whose error is about `size` c in the moving frame, at 1−β from 10^low to 10^high."""
    beta = 1 - power(rng, low, high)
    gamma = 1 / math.sqrt(1 - beta * beta)
    sigma = [size * power(rng, -1, 0) / gamma**2 for _ in range(3)]
    stated = sigma if rng.random() < 0.5 else {"covariance": covariance(rng, sigma)}
    return {"beta": regimes.vector(rng, beta), "uncertainty": stated}


def _axes(rng, size):
    sigma = [size * power(rng, -1, 0) for _ in range(3)]
    stated = sigma if rng.random() < 0.5 else {"covariance": covariance(rng, sigma)}
    return {"axis": regimes.direction(rng), "angle": rng.uniform(-3, 3), "uncertainty": stated}


def _directed(rng, size):
    """A direction and a speed in one of its forms."""
    rapidity = rng.uniform(0.05, 4)
    name, value, slope = rng.choice([
        ("rapidity", rapidity, 1.0), ("beta", math.tanh(rapidity), 1 / math.cosh(rapidity) ** 2),
        ("gamma", math.cosh(rapidity), math.sinh(rapidity))])
    return {"direction": regimes.direction(rng), name: value,
            "uncertainty": {"value": size * power(rng, -1, 0) * slope,
                            "direction": size * power(rng, -1, 0) / math.sinh(rapidity)}}


def _chain(rng, size):
    steps = []
    for _ in range(rng.randint(2, 5)):
        step = {"boost": _moving(rng, size, -1, -0.02)} if rng.random() < 0.5 else {"rotate": _axes(rng, size)}
        ((_, content),) = step.items()
        if rng.random() < 0.3:
            content["inverse"] = True
        if rng.random() < 0.3:
            del content["uncertainty"]
        steps.append(step)
    return steps


def _slow(rng, size):
    beta = power(rng, -6, -2)
    return [{"boost": {"velocity": regimes.vector(rng, beta * regimes.C),
                       "uncertainty": [size * beta * regimes.C * power(rng, -1, 0) for _ in range(3)]}}]


def _cancelling(rng, size):
    """Past a first boost back to where the reading came from, but for its errors."""
    boost = _moving(rng, size, -3, -0.1)
    back = {key: value for key, value in boost.items() if key != "uncertainty"} | {"inverse": True}
    return [{"boost": boost}, {"rotate": _axes(rng, size)}, {"boost": back}]


EXPERIMENTS = {
    "slow": _slow,
    "beta up to 0.9": lambda rng, size: [{"boost": _moving(rng, size, -1, -0.02)}],
    "gamma up to 100": lambda rng, size: [{"boost": _moving(rng, size, -4.3, -1)}],
    "E next to -v x B": lambda rng, size: [{"boost": _moving(rng, size, -1, -0.02)}],
    "rotation": lambda rng, size: [{"rotate": _axes(rng, size)}],
    "direction and speed": lambda rng, size: [{"boost": _directed(rng, size)}],
    "boost and rotation": lambda rng, size: [{"boost": _moving(rng, size, -2, -0.02)}, {"rotate": _axes(rng, size)}],
    "chain of 2 to 5 steps": _chain,
    "there and back": _cancelling,
}
