"""Random questions in every regime where a plain formula loses digits, by name.

Each generator takes a `random.Random` and returns a question. The answers stay within the range of
a double, except where said.
"""

import math
from fractions import Fraction

C = 299_792_458.0


def direction(rng):
    """A unit vector, uniform on the sphere."""
    while True:
        v = [rng.gauss(0, 1) for _ in range(3)]
        length = math.hypot(*v)
        if length > 1e-3:
            return [x / length for x in v]


def vector(rng, size):
    return [size * x for x in direction(rng)]


def power(rng, low, high):
    """A size spread evenly over decades, from 10^low to 10^high."""
    return 10 ** rng.uniform(low, high)


def cross(a, b):
    """Rounded once per component from the exact rational value."""
    a, b = [Fraction(x) for x in a], [Fraction(x) for x in b]
    return [float(a[i - 2] * b[i - 1] - a[i - 1] * b[i - 2]) for i in range(3)]


def comparable(rng):
    """E and cB of about the same size."""
    e = power(rng, -6, 9)
    return {"e": vector(rng, e * power(rng, -1, 1)), "b": vector(rng, e / C)}


def _any_speed(rng, top=0.9):
    return power(rng, -12, math.log10(top))


def slow(rng):
    return comparable(rng) | {"velocity": vector(rng, C * power(rng, -12, -3))}


def fast(rng):
    return comparable(rng) | {"velocity": vector(rng, C * rng.uniform(0.001, 0.9))}


def beta_form(rng):
    return comparable(rng) | {"boost": {"beta": vector(rng, _any_speed(rng))}}


def near_c(rng):
    """1−β down to 1e-15, by β and by velocity."""
    unit, name = rng.choice([(1.0, "beta"), (C, "velocity")])
    while True:
        v = vector(rng, unit * (1 - power(rng, -15, -1)))
        if sum(Fraction(x) ** 2 for x in v) < Fraction(unit) ** 2:
            return comparable(rng) | {"boost": {name: v}}


def speed_form(rng):
    """A direction of any length and β, down to 1−|β| = 1e-16 and to |β| = 1e-12."""
    beta = rng.choice([power(rng, -12, -0.01), 1 - power(rng, -16, -1)])
    return comparable(rng) | {"boost": {"direction": vector(rng, power(rng, -3, 3)),
                                        "beta": rng.choice([-1, 1]) * min(beta, 1 - 2**-53)}}


def gamma_form(rng):
    return comparable(rng) | {"boost": {"direction": vector(rng, power(rng, -3, 3)),
                                        "gamma": 1 + power(rng, -15, 20)}}


def rapidity_form(rng):
    """Rapidity to 700, where γ = 5e303; weak fields, so that the answer fits."""
    question = {"e": vector(rng, power(rng, -6, 2)), "b": vector(rng, power(rng, -14, -6))}
    return question | {"boost": {"direction": direction(rng),
                                 "rapidity": rng.uniform(-1, 1) * rng.choice([1e-9, 1, 40, 700])}}


def energy_form(rng):
    return comparable(rng) | {
        "units": {"energy": rng.choice(["eV", "keV", "MeV", "GeV", "J"])},
        "boost": {
            "direction": direction(rng),
            "kinetic_energy": power(rng, -12, 3),
            "particle": rng.choice(["electron", "muon", "proton", "deuteron", "alpha",
                                    {"rest_energy": power(rng, -6, 3)}]),
        }}


def turning_body(rng):
    return comparable(rng) | {"boost": {"angular_velocity": vector(rng, power(rng, -6, 4)),
                                        "position": vector(rng, power(rng, -3, 3))}}


def electric_dominates(rng):
    return {"e": vector(rng, 1e6), "b": vector(rng, 1e6 / C * power(rng, -30, -3)),
            "boost": {"beta": vector(rng, _any_speed(rng))}}


def magnetic_dominates(rng):
    return {"e": vector(rng, C * power(rng, -30, -3)), "b": vector(rng, 1),
            "boost": {"beta": vector(rng, _any_speed(rng))}}


def plane_wave(rng):
    """E ⟂ B, E = cB but for rounding, and a frame that runs with the wave or against it."""
    n, any_way = direction(rng), direction(rng)
    e = cross(n, any_way)
    b = [x / C for x in cross(n, e)]
    sign = rng.choice([-1, 1])
    if rng.random() < 0.5:
        boost = {"beta": [sign * (1 - power(rng, -14, -0.1)) * x for x in n]}
    else:
        boost = {"direction": [sign * x for x in n], "gamma": 1 + power(rng, -6, 15)}
    return {"e": e, "b": b, "boost": boost}


def exact_plane_wave(rng):
    """E = cB without any rounding, along an axis: the answer is the question times e^±η."""
    k = rng.randrange(3)
    b0 = float(rng.randrange(1, 2**24))
    e, b, d = [0.0] * 3, [0.0] * 3, [0.0] * 3
    d[k], e[k - 2], b[k - 1] = rng.choice([-1.0, 1.0]), C * b0, b0
    return {"e": e, "b": b, "boost": {"direction": d, "rapidity": rng.uniform(0, 600)}}


def motional_cancels(rng):
    """E = −v×B to the last bit: what is left is the rounding of the question, exactly."""
    v, b = vector(rng, C * power(rng, -6, -0.1)), vector(rng, power(rng, -9, 1))
    return {"e": [-x for x in cross(v, b)], "b": b, "velocity": v}


def nearly_null(rng):
    """E² − c²B² and E·B vanish but for 1e-16 to 1e-1."""
    n, any_way = direction(rng), direction(rng)
    e = cross(n, any_way)
    off = power(rng, -16, -1)
    b = [x / C * (1 + off) + off * y / C for x, y in zip(cross(n, e), direction(rng))]
    return {"e": e, "b": b, "boost": {"beta": vector(rng, _any_speed(rng, 0.999))}}


def parallel_to_motion(rng):
    n = direction(rng)
    return {"e": [rng.gauss(0, 1) * 1e3 * x for x in n], "b": [rng.gauss(0, 1) * 1e-5 * x for x in n],
            "boost": {"direction": n, "gamma": 1 + power(rng, -9, 9)}}


def subnormal(rng):
    """Both fields, or the answer alone, below the smallest normal double."""
    return {"e": vector(rng, power(rng, -322, -306)), "b": vector(rng, power(rng, -322, -312)),
            "boost": {"beta": vector(rng, _any_speed(rng))}}


def tiny(rng):
    return {"e": vector(rng, power(rng, -302, -290)), "b": vector(rng, power(rng, -302, -298)),
            "boost": {"beta": vector(rng, _any_speed(rng))}}


def huge(rng):
    return {"e": vector(rng, power(rng, 290, 302)), "b": vector(rng, power(rng, 285, 296)),
            "boost": {"beta": vector(rng, _any_speed(rng))}}


def mixed_scales(rng):
    def component(low, high):
        return rng.choice([-1, 1]) * power(rng, low, high)

    return {"e": [component(-150, 150) for _ in range(3)], "b": [component(-150, 140) for _ in range(3)],
            "boost": {"direction": [component(-100, 100) for _ in range(3)],
                      "gamma": 1 + power(rng, -15, 15)}}


def past_the_largest(rng):
    """About half of the answers exceed the largest double."""
    return {"e": vector(rng, power(rng, 300, 308)), "b": vector(rng, power(rng, 295, 302)),
            "boost": {"direction": direction(rng), "gamma": 1 + power(rng, -3, 5)}}


BOOSTS = {
    "velocity, beta 1e-12 to 1e-3": slow,
    "velocity, beta 0.001 to 0.9": fast,
    "beta": beta_form,
    "direction and beta": speed_form,
    "1-beta down to 1e-15": near_c,
    "gamma to 1e20": gamma_form,
    "rapidity to 700": rapidity_form,
    "kinetic energy of a particle": energy_form,
    "point of a turning body": turning_body,
    "E far above cB": electric_dominates,
    "E far below cB": magnetic_dominates,
    "plane wave along +-v": plane_wave,
    "plane wave, exact, along an axis": exact_plane_wave,
    "E = fl(-v x B)": motional_cancels,
    "nearly null": nearly_null,
    "parallel to v": parallel_to_motion,
    "subnormal": subnormal,
    "1e-300": tiny,
    "1e+300": huge,
    "mixed scales": mixed_scales,
}
