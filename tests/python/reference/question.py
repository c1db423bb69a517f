"""A question as it goes to `POST /v1/transform`, read a second time, and answered exactly."""

from functools import cached_property

from mpmath import mpf

from . import field
from .algebra import apply, product, scale, transpose
from .boost import beta_of, boost_fields, boost_matrix, gamma_of
from .rotation import matrix_of, quaternion_of
from .units import C, Units


class Exact:
    """The exact answer: fields in the answer's units, everything else in SI."""

    def __init__(self, question):
        self.units = Units(question.get("units"))
        self.answer_units = Units((question.get("units") or {}) | (question.get("answer_units") or {}))
        self.steps = list(_steps(question, self.units))
        zero = [0.0, 0.0, 0.0]
        self._source = (
            self.units.vector("e", question.get("e") or zero),
            scale(mpf(C), self.units.vector("b", question.get("b") or zero)),
        )

    @cached_property
    def si(self):
        """(E', cB') in V/m by the textbook vector formulas, one step after the other."""
        e, cb = self._source
        for kind, value in self.steps:
            if kind == "boost":
                e, cb = boost_fields(value, e, cb)
            else:
                e, cb = apply(transpose(value), e), apply(transpose(value), cb)
        return e, cb

    @cached_property
    def si_by_tensor(self):
        """The same by F' = ΛFΛᵀ with the net 4×4 matrix: a route that shares no formula."""
        e, cb = self._source
        f = field.tensor(e, cb)
        return field.vectors(product(self.matrix, f, transpose(self.matrix)))

    @property
    def e(self):
        return scale(1 / self.answer_units.factor("e"), self.si[0])

    @property
    def b(self):
        return scale(1 / (C * self.answer_units.factor("b")), self.si[1])

    @cached_property
    def matrix(self):
        """The net Lorentz matrix Λ."""
        net = boost_matrix([mpf(0)] * 3)
        for kind, value in self.steps:
            net = product(boost_matrix(value) if kind == "boost" else _turn4(value), net)
        return net

    @cached_property
    def gamma(self):
        return self.matrix[0][0]

    @cached_property
    def beta(self):
        """The net β on the source axes: the first row of Λ = rotation · boost is γ(1, −β)."""
        return scale(-1 / self.gamma, self.matrix[0][1:])

    @cached_property
    def rotation(self):
        """The turn R that follows the net boost; components become Rᵀ v."""
        turn = product(self.matrix, boost_matrix(scale(-1, self.beta)))
        return transpose([row[1:] for row in turn[1:]])

    @property
    def quaternion(self):
        return quaternion_of(self.rotation)

    @property
    def invariants(self):
        return field.invariants(*self._source)

    def energy(self, mu_0):
        """(density, Poynting vector, stress) of the answer for a given μ₀ in N/A²."""
        e, cb = self.si
        return field.energy(e, scale(1 / mpf(C), cb), mpf(mu_0))

    @property
    def tensors(self):
        """(contravariant, covariant, dual) of the answer, mostly-minus signature, in tesla."""
        parts = [scale(1 / mpf(C), vector) for vector in self.si]
        contravariant = field.tensor(*parts)
        return contravariant, field.lower(contravariant), field.dual(*parts)

    @property
    def parallel(self):
        """(β, E', cB') of the frame where the answer's fields are parallel, or None."""
        beta = field.parallel_beta(*self.si)
        return beta and (beta, *boost_fields(beta, *self.si))


def solve(question):
    """The exact answer to a question (a dict as it is sent)."""
    return Exact(question)


def _turn4(r):
    """A turn of the axes as a 4×4 matrix on components."""
    turn = transpose(r)
    return [[mpf(1), *[mpf(0)] * 3]] + [[mpf(0), *row] for row in turn]


def _steps(question, units):
    way = question.get("steps")
    if way is None:
        shorthand = {"velocity": lambda v: {"boost": {"velocity": v}},
                     "rotation": lambda r: {"rotate": r},
                     "boost": lambda b: {"boost": b}}
        (name,) = shorthand.keys() & question.keys()
        way = [shorthand[name](question[name])]
    whole = bool(question.get("inverse"))
    for step in reversed(way) if whole else way:
        ((kind, content),) = step.items()
        undo = bool(content.get("inverse")) != whole
        if kind == "boost":
            beta = beta_of(content, units)
            yield kind, scale(-1, beta) if undo else beta
        else:
            r = matrix_of(content, units)
            yield kind, transpose(r) if undo else r


__all__ = ["Exact", "gamma_of", "solve"]
