"""The law of propagation, JCGM 102:2011, 6.2.1.3: C' = J C Jᵀ, with J by central differences.

With numbers of 4,400 bits and steps of 2⁻⁶⁰⁰ of each input, the differences are exact far beyond a
double. An uncertain rotation is followed by a further small turn, as its definition says; an
uncertain direction is itself turned about two axes perpendicular to it.
"""

import copy

from mpmath import mp, mpf

from .algebra import IDENTITY3, apply, cross, norm, scale
from .question import solve
from .rotation import about

SMALL = mpf(2) ** -600


def propagate(question):
    """(covariance of E', B' in the answer's units as 6×6, invariants' variances in V⁴/m⁴)."""
    question = as_steps(question)
    stated = question.pop("uncertainty", {})
    blocks = [*_reading(question, stated)]
    for i, step in enumerate(question["steps"]):
        ((kind, content),) = step.items()
        uncertainty = content.pop("uncertainty", None)
        if uncertainty is not None:
            blocks += _boost(question, i, content, uncertainty) if kind == "boost" else _turn(i, content, uncertainty)
    total = [[mpf(0)] * 6 for _ in range(6)]
    invariants = [mpf(0)] * 2
    for shifts, covariance in blocks:
        columns, changes = [], []
        for shift in shifts:
            up, down = (solve(shift(question, sign * SMALL)) for sign in (1, -1))
            columns.append([(a - b) / (2 * SMALL) for a, b in zip(up.e + up.b, down.e + down.b)])
            changes.append([(a - b) / (2 * SMALL) for a, b in zip(up.invariants, down.invariants)])
        for i in range(6):
            for j in range(6):
                total[i][j] += _sandwich([c[i] for c in columns], covariance, [c[j] for c in columns])
        for i in range(2):
            gradient = [c[i] for c in changes]
            invariants[i] += _sandwich(gradient, covariance, gradient)
    return total, invariants


def as_steps(question):
    """The same question with its way as `steps`, each with its uncertainty inside."""
    question = copy.deepcopy(question)
    uncertainty = question.get("uncertainty", {})
    for name, kind in (("velocity", "boost"), ("boost", "boost"), ("rotation", "rotate")):
        if name in question:
            content = question.pop(name)
            content = {"velocity": content} if name == "velocity" else content
            if name in uncertainty:
                content["uncertainty"] = uncertainty.pop(name)
            question["steps"] = [{kind: content}]
    return question


def _sandwich(a, covariance, b):
    return sum((x * covariance[i][j] * y for i, x in enumerate(a) for j, y in enumerate(b)), mpf(0))


def matrix(stated, size=3):
    """A covariance matrix from standard uncertainties or as stated, exactly."""
    if isinstance(stated, dict):
        stated = stated["covariance"]
    if isinstance(stated[0], list):
        return [[mpf(x) for x in row] for row in stated]
    return [[mpf(x) ** 2 if i == j else mpf(0) for j in range(size)] for i, x in enumerate(stated)]


def _shift(path, index):
    """Adds to a number, or to one component of a vector, at a path into the question."""

    def shifted(question, by):
        question = copy.deepcopy(question)
        *way, last = path
        owner = question
        for name in way:
            owner = owner[name]
        if index is None:
            owner[last] = mpf(owner[last]) + by
        else:
            owner[last] = [mpf(x) + (by if k == index else 0) for k, x in enumerate(owner[last])]
        return question

    return shifted


def _vector(path, stated):
    return [_shift(path, i) for i in range(3)], matrix(stated)


def _reading(question, stated):
    question["e"] = question.get("e") or [0.0] * 3
    question["b"] = question.get("b") or [0.0] * 3
    if "covariance" in stated:
        shifts = [_shift([name], i) for name in "eb" for i in range(3)]
        yield shifts, matrix(stated["covariance"])
    for name in "eb":
        if name in stated:
            yield _vector([name], stated[name])


def _boost(question, i, content, stated):
    path = ["steps", i, "boost"]
    if "direction" in content:
        (speed,) = content.keys() & {"beta", "gamma", "rapidity", "kinetic_energy"}
        blocks = [([_shift([*path, speed], None)], [[mpf(stated.get("value", 0)) ** 2]])]
        d = [mpf(x) for x in content["direction"]]
        least = min(range(3), key=lambda k: abs(d[k]))
        first = cross(d, [mpf(k == least) for k in range(3)])
        first = scale(1 / norm(first), first)
        second = scale(1 / norm(d), cross(d, first))
        unit = _angle_unit(question)
        sigma = mpf(stated.get("direction", 0))
        blocks.append(([_turned(path, d, axis, unit) for axis in (first, second)],
                       [[sigma**2, mpf(0)], [mpf(0), sigma**2]]))
        return blocks
    if "angular_velocity" in content:
        return [_vector([*path, name], stated[name]) for name in stated]
    (form,) = content.keys() & {"velocity", "beta"}
    return [_vector([*path, form], stated)]


def _angle_unit(question):
    return mp.pi / 180 if (question.get("units") or {}).get("angle") == "deg" else mpf(1)


def _turned(path, direction, axis, unit):
    def shifted(question, by):
        question = copy.deepcopy(question)
        owner = question
        for name in path:
            owner = owner[name]
        owner["direction"] = apply(about(axis, by * unit), direction)
        return question

    return shifted


def _turn(i, content, stated):
    inverse = {"inverse": True} if content.get("inverse") else {}

    def further(axis):
        def shifted(question, by):
            question = copy.deepcopy(question)
            small = {"rotate": {"axis": axis, "angle": by} | inverse}
            # Undone, the further turn comes first.
            question["steps"].insert(i if inverse else i + 1, small)
            return question

        return shifted

    return [([further([float(x) for x in row]) for row in IDENTITY3], matrix(stated))]
