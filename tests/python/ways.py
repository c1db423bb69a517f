"""Random questions whose way is a rotation, a chain of steps, or comes in many units."""

from regimes import C, comparable, direction, power, vector

SEQUENCES = [a + b + c for a in "xyz" for b in "xyz" for c in "xyz" if a != b != c]


def rotation(rng):
    """Any form of a rotation."""
    return rng.choice([axis_angle, quaternion, matrix, euler])(rng)


def axis_angle(rng):
    return {"axis": vector(rng, power(rng, -3, 3)), "angle": rng.uniform(-7, 7)}


def quaternion(rng, off=0.9e-6):
    """Off from unit length by up to `off`, as printed decimals are."""
    q = [rng.gauss(0, 1) for _ in range(4)]
    length = sum(x * x for x in q) ** 0.5 * (1 + rng.uniform(-off, off))
    return {"quaternion": dict(zip("wxyz", (x / length for x in q)))}


def matrix(rng, off=0.4e-6):
    """Orthogonal but for `off` in each element."""
    q = quaternion(rng, 0)["quaternion"]
    w, x, y, z = q["w"], q["x"], q["y"], q["z"]
    rows = [
        [1 - 2 * (y * y + z * z), 2 * (x * y - w * z), 2 * (x * z + w * y)],
        [2 * (x * y + w * z), 1 - 2 * (x * x + z * z), 2 * (y * z - w * x)],
        [2 * (x * z - w * y), 2 * (y * z + w * x), 1 - 2 * (x * x + y * y)],
    ]
    return {"matrix": [[value + rng.uniform(-off, off) for value in row] for row in rows]}


def euler(rng):
    return {"euler": {"axes": rng.choice(SEQUENCES), "angles": [rng.uniform(-7, 7) for _ in range(3)],
                      "about": rng.choice(["moving", "fixed"])}}


def boost(rng):
    """A boost of ordinary speed in any form."""
    return rng.choice([
        lambda: {"velocity": vector(rng, C * power(rng, -6, -0.05))},
        lambda: {"beta": vector(rng, power(rng, -6, -0.05))},
        lambda: {"direction": direction(rng), "gamma": 1 + power(rng, -6, 1)},
        lambda: {"direction": direction(rng), "rapidity": rng.uniform(-2, 2)},
        lambda: {"angular_velocity": vector(rng, 1e3), "position": vector(rng, power(rng, -1, 4))},
    ])()


def step(rng):
    content = {"inverse": True} if rng.random() < 0.3 else {}
    if rng.random() < 0.5:
        return {"boost": boost(rng) | content}
    return {"rotate": rotation(rng) | content}


def one_rotation(rng):
    return comparable(rng) | {"rotation": rotation(rng)}


def chain(rng):
    return comparable(rng) | {"steps": [step(rng) for _ in range(rng.randint(2, 12))],
                              "inverse": rng.random() < 0.3}


def long_chain(rng):
    """Hundreds of small steps; the net γ stays moderate."""
    steps = [
        {"boost": {"beta": vector(rng, power(rng, -9, -1.5))}} if rng.random() < 0.5
        else {"rotate": rotation(rng)}
        for _ in range(rng.choice([300, 1000]))
    ]
    return comparable(rng) | {"steps": steps}


def up_and_down(rng, top=1.0, half=499):
    """A way out and, step by step, back again, with one small step left over in the middle."""
    out = [
        {"boost": {"direction": direction(rng), "rapidity": rng.uniform(0, top)}} if rng.random() < 0.5
        else {"rotate": rotation(rng)}
        for _ in range(half)
    ]
    back = [{kind: content | {"inverse": True}} for step in reversed(out) for kind, content in step.items()]
    middle = [{"boost": {"beta": vector(rng, 1e-3)}}] if rng.random() < 0.5 else []
    return comparable(rng) | {"steps": out + middle + back}


def high_and_back(rng):
    """Through γ of 1e6 to 1e20 and back, where double-double alone would no longer do."""
    d, gamma = direction(rng), power(rng, 6, 20)
    there = {"direction": d, "gamma": gamma}
    return comparable(rng) | {"steps": [
        {"rotate": rotation(rng)}, {"boost": there}, {"rotate": axis_angle(rng) | {"angle": power(rng, -9, -1)}},
        {"boost": there | {"inverse": True}}]}


def cancelling_chain(rng):
    """The last step brings the reading to where almost nothing of E is left."""
    v, b = vector(rng, power(rng, 2, 7)), vector(rng, power(rng, -9, 1))
    e = [v[2] * b[1] - v[1] * b[2], v[0] * b[2] - v[2] * b[0], v[1] * b[0] - v[0] * b[1]]
    return {"e": e, "b": b, "steps": [{"boost": {"velocity": v}}, {"rotate": rotation(rng)}]}


def tiny_step_left(rng):
    """E cancels but for a last step of 1e-10 to 1e-300 m/s or rad."""
    v, b = float(rng.randrange(1, 10**6)), float(rng.randrange(1, 100))
    boost, small = {"boost": {"velocity": [v, 0, 0]}}, power(rng, -300, -10)
    return {"e": [0, v * b, 0], "b": [0, 0, b], "steps": rng.choice([
        [boost, {"boost": {"velocity": vector(rng, small)}}],
        [boost, {"boost": {"velocity": [small, 0, 0]}}],
        [{"rotate": {"axis": direction(rng), "angle": small}}, boost],
    ])}


UNITS = {
    "e": ["V/m", "mV/m", "uV/m", "kV/m", "MV/m", "V/cm", "statV/cm"],
    "b": ["T", "mT", "uT", "nT", "pT", "G"],
    "velocity": ["m/s", "km/s", "[kn_i]"],
    "angle": ["rad", "deg"],
    "angular_velocity": ["rad/s", "deg/s", "circ/s", "circ/min"],
    "length": ["m", "km", "cm", "mm"],
}


def any_units(rng):
    """Every unit of the question and of the answer drawn anew; values near 1 in each."""
    units = {name: rng.choice(codes) for name, codes in UNITS.items()}
    way = rng.choice([
        {"velocity": vector(rng, power(rng, 0, 4))},
        {"rotation": {"axis": direction(rng), "angle": rng.uniform(-360, 360)}},
        {"boost": {"angular_velocity": vector(rng, 10), "position": vector(rng, 10)}},
        {"steps": [{"rotate": {"axis": direction(rng), "angle": 30}}, {"boost": {"velocity": vector(rng, 7.6)}}]},
    ])
    answer = {name: rng.choice(UNITS[name]) for name in "eb"} if rng.random() < 0.5 else {}
    return {"e": vector(rng, power(rng, -3, 3)), "b": vector(rng, power(rng, -3, 3)), "units": units,
            **way, **({"answer_units": answer} if answer else {})}


def cancelling_units(rng):
    """v×B and E cancel exactly in decimal units, so that rounded factors would show.

    For instance 8 km/s across 45000 nT against 360 mV/m.
    """
    speed, b = rng.randrange(1, 100), 1000 * rng.randrange(1, 100)
    exact = rng.random() < 0.5
    return {"e": [0, speed * b / 1000 * (1 if exact else 1 + 1e-13), rng.choice([0, 1e-9])],
            "b": [0, 0, b], "velocity": [speed, 0, 0],
            "units": {"e": "mV/m", "b": "nT", "velocity": "km/s"}}


WAYS = {
    "rotation, any form": (one_rotation, 400),
    "chain of 2 to 12 steps": (chain, 300),
    "chain of 300 or 1,000 steps": (long_chain, 6),
    "up and down, 999 steps": (up_and_down, 4),
    "through gamma 1e6 to 1e20 and back": (high_and_back, 60),
    "chain that nearly cancels E": (cancelling_chain, 200),
    "chain that cancels E but for a tiny step": (tiny_step_left, 100),
    "any units": (any_units, 500),
    "units in which E cancels": (cancelling_units, 100),
}
