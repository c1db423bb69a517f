"""An independent computation of the demonstration: its files read anew, all of it in mpmath.

Only what stands in the files is used, and textbook formulas: a point on a line, a constant turn
between two attitudes, and the field of a moving frame (Jackson, Classical Electrodynamics, 3rd ed.,
eq. 11.149, number from memory).
"""

import csv
import tomllib
from bisect import bisect_right
from pathlib import Path

import mpmath
from mpmath import mp, mpf

DEMO = Path(__file__).resolve().parents[2] / "deploy" / "demo"
C = mpf(299792458)


def readings():
    """The rows of the reading file: time, E and B as raw numbers; None where nothing was read."""
    with (DEMO / "readings.csv").open() as file:
        for row in csv.DictReader(file):
            value = lambda name: float(row[name]) if row[name] else None
            yield float(row["time"]), [value("ex"), value("ey"), value("ez")], [value("bx"), value("by"), value("bz")]


class Payload:
    def __init__(self):
        mp.dps = max(mp.dps, 40)
        self.frames = tomllib.loads((DEMO / "frames.toml").read_text())["frames"]
        with (DEMO / self.frames["payload"]["track"]).open() as file:
            self.track = [{name: mpf(float(text)) for name, text in row.items()} for row in csv.DictReader(file)]

    def to_ground(self, time, e, b):
        """Raw numbers of the boom → E in mV/m and B in nT on the ground."""
        e, b = self._calibrated(e, b)
        mount = self.frames["boom"]["steps"][0]["rotate"]
        spin = self.frames["spinning"]["turning"]
        assert mount["axis"] == [0, 0, 1] and spin["angular_velocity"][:2] == [0, 0]
        degrees = mount["angle"] + mpf(spin["phase"]) + mpf(spin["angular_velocity"][2]) * (mpf(time) - spin["epoch"])
        e, b = (_about_z(v, degrees * mpmath.pi / 180) for v in (e, b))
        velocity, attitude = self._motion(mpf(time))
        e, b = (_rotated(attitude, v) for v in (e, b))
        return _at_rest(velocity, e, b)

    def _calibrated(self, e, b):
        fields = []
        for raw, sensor in zip((e, b), (self.frames["boom"]["sensor"][name] for name in "eb")):
            net = [mpf(0) if x is None else mpf(x) - mpf(o) for x, o in zip(raw, sensor["offset"])]
            fields.append([sum(mpf(m) * x for m, x in zip(row, net)) for row in sensor["matrix"]])
        e, b = fields
        e[2] = -(e[0] * b[0] + e[1] * b[1]) / b[2]
        return e, b

    def _motion(self, time):
        times = [row["time"] for row in self.track]
        i = min(bisect_right(times, time) - 1, len(times) - 2)
        before, after = self.track[i], self.track[i + 1]
        part = (time - before["time"]) / (after["time"] - before["time"])
        velocity = [before[name] + part * (after[name] - before[name]) for name in ("vx", "vy", "vz")]
        one, two = ([row[name] for name in ("qw", "qx", "qy", "qz")] for row in (before, after))
        one, two = ([x / mpmath.norm(q) for x in q] for q in (one, two))
        cosine = sum(x * y for x, y in zip(one, two))
        if cosine < 0:
            two, cosine = [-x for x in two], -cosine
        theta = mpmath.acos(cosine)
        weights = mpmath.sin((1 - part) * theta) / mpmath.sin(theta), mpmath.sin(part * theta) / mpmath.sin(theta)
        return velocity, [weights[0] * x + weights[1] * y for x, y in zip(one, two)]


def _about_z(v, angle):
    cos, sin = mpmath.cos(angle), mpmath.sin(angle)
    return [cos * v[0] - sin * v[1], sin * v[0] + cos * v[1], v[2]]


def _rotated(q, v):
    """q v q*."""
    w, u = q[0], q[1:]
    t = [2 * x for x in _cross(u, v)]
    return [a + w * b + c for a, b, c in zip(v, t, _cross(u, t))]


def _at_rest(velocity, e, b):
    """From the frame that moves at this velocity (m/s) to the one it is seen from; mV/m and nT."""
    e, cb = [x / 1000 for x in e], [C * x / 10**9 for x in b]
    beta = [-x / C for x in velocity]
    beta2 = sum(x * x for x in beta)
    gamma = 1 / mpmath.sqrt(1 - beta2)

    def moved(own, other, sign):
        along = sum(x * y for x, y in zip(beta, own)) / beta2
        return [gamma * (x + sign * y) - (gamma - 1) * along * z
                for x, y, z in zip(own, _cross(beta, other), beta)]

    return [1000 * x for x in moved(e, cb, 1)], [10**9 * x / C for x in moved(cb, e, -1)]


def _cross(a, b):
    return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
