"""Writes the track and the readings of the invented payload of frames.toml; needs only Python.

On the ground stands a uniform field with E·B = 0. The readings are what the booms and the
fluxgate of the payload would show of it, rounded as telemetry rounds them.
"""

import csv
import math
from pathlib import Path

HERE = Path(__file__).parent
C = 299792458.0
E_GROUND = [12.0, 20.0, 6.0]           # mV/m, across B
B_GROUND = [1500.0, 15000.0, -53000.0]  # nT, dipping to the north
SPIN, PHASE, MOUNT = 223.2, 17.5, 30.0  # deg/s and deg, as in frames.toml


def product(a, b):
    """Hamilton's product of quaternions w, x, y, z."""
    (aw, ax, ay, az), (bw, bx, by, bz) = a, b
    return (aw * bw - ax * bx - ay * by - az * bz, aw * bx + ax * bw + ay * bz - az * by,
            aw * by - ax * bz + ay * bw + az * bx, aw * bz + ax * by - ay * bx + az * bw)


def about(axis, degrees):
    """The turn about a coordinate axis."""
    half = math.radians(degrees) / 2
    return (math.cos(half), *(math.sin(half) if name == axis else 0.0 for name in "xyz"))


def unturn(q, v):
    """Components of v on axes turned by q."""
    w, x, y, z = q
    return product(product((w, -x, -y, -z), (0.0, *v)), q)[1:]


def cross(a, b):
    return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]


def velocity(t):
    """Of the payload in m/s: up and to the north, then falling."""
    return [30.0, 260.0, 1750.0 - 9.2 * t]


def attitude(t):
    """Ground axes to payload axes: a cone of 4 degrees about a line 6 degrees off the vertical."""
    cone = product(product(about("z", 2.8 * t), about("x", 4.0)), about("z", -2.8 * t))
    return product(about("x", -6.0), cone)


def seen(t):
    """E in mV/m and B in nT on the axes of the booms."""
    v = velocity(t)
    gamma = 1 / math.sqrt(1 - sum(x * x for x in v) / C**2)
    vxb = [x * 1e-6 for x in cross(v, B_GROUND)]
    vxe = [x * 1e6 / C**2 for x in cross(v, E_GROUND)]
    e, b = ([gamma * (f + s * m) - k * p for f, m, p in zip(field, moved, v)]
            for field, moved, s, k in (
                (E_GROUND, vxb, 1, along(gamma, v, E_GROUND)), (B_GROUND, vxe, -1, along(gamma, v, B_GROUND))))
    q = product(product(attitude(t), about("z", PHASE + SPIN * t)), about("z", MOUNT))
    return unturn(q, e), unturn(q, b)


def along(gamma, v, f):
    return (gamma - 1) * sum(a * b for a, b in zip(v, f)) / sum(x * x for x in v)


def counts(t):
    """What the electronics show: the calibrations of frames.toml backwards."""
    (ex, ey, _), (bx, by, bz) = seen(t)
    det = 500 * 495 + 1.5 * 2.0
    volts = [(495 * ex + 1.5 * ey) / det + 0.0021, (500 * ey - 2.0 * ex) / det - 0.0013]
    # Nearly triangular: a few rounds of substitution are exact enough for whole counts.
    x = y = z = 0.0
    for _ in range(20):
        x, y, z = (bx - 0.004 * y) / 1.907, (by + 0.003 * z) / 1.912, (bz - 0.006 * x) / 1.899
    return [round(u, 6) for u in volts] + [round(x + 12), round(y - 7), round(z + 30)]


def main():
    with (HERE / "flight.csv").open("w", newline="") as file:
        rows = csv.writer(file, lineterminator="\n")
        rows.writerow(["time", "vx", "vy", "vz", "qw", "qx", "qy", "qz",
                       "u_vx", "u_vy", "u_vz", "u_rx", "u_ry", "u_rz"])
        for t in range(60, 361, 2):
            rows.writerow([t, *(round(x, 3) for x in velocity(t)), *(round(x, 12) for x in attitude(t)),
                           0.5, 0.5, 0.8, 0.05, 0.05, 0.2])
    with (HERE / "readings.csv").open("w", newline="") as file:
        rows = csv.writer(file, lineterminator="\n")
        rows.writerow(["time", "ex", "ey", "ez", "bx", "by", "bz"])
        for n in range(400):
            t = 120 + n / 8
            volts_x, volts_y, *b = counts(t)
            rows.writerow([t, volts_x, volts_y, "", *b])


if __name__ == "__main__":
    main()
