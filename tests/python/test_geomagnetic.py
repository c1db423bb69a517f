"""Real input: the geomagnetic reference field along an orbit, and what a probe on it sees.

The field is the International Geomagnetic Reference Field, 14th generation (IAGA, 2024; the
coefficients to degree 13 come with the `ppigrf` package). The orbit is ours: circular, 500 km up,
inclined by 51.6°. In the frame that turns with the Earth E is taken as zero, as is common practice
for the corotating ionosphere; there the probe moves with v = v_orbit − Ω×r and sees v×B.
"""

import datetime

import numpy as np
import pytest
import ppigrf

DATE = datetime.datetime(2025, 1, 1)
RADIUS = 6371.2 + 500.0  # km; 6371.2 km is the reference radius of the model
GM = 398600.4418  # km³/s², IERS Conventions (2010), TN 36, table 1.1
SPIN = np.array([0.0, 0.0, 7.292115e-5])  # rad/s, IERS Conventions (2010), TN 36, table 1.1
INCLINATION = np.radians(51.6)
UNITS = {"e": "mV/m", "b": "nT", "velocity": "km/s"}

# γ − 1 = ½(7.3 km/s / c)² = 3.0e-10 and no more: v×B in plain doubles is off by that and its rounding.
RELATIVISTIC = 3.3e-10


def orbit(argument):
    """Position (km), velocity in the turning frame (km/s) and IGRF field (nT), Earth-fixed axes."""
    node, pole = np.array([1.0, 0.0, 0.0]), np.array([0.0, np.cos(INCLINATION), np.sin(INCLINATION)])
    r = RADIUS * (np.cos(argument) * node + np.sin(argument) * pole)
    v = np.sqrt(GM / RADIUS) * (-np.sin(argument) * node + np.cos(argument) * pole) - np.cross(SPIN, r)
    theta, phi = np.arccos(r[2] / RADIUS), np.arctan2(r[1], r[0])
    parts = ppigrf.igrf_gc(RADIUS, np.degrees(theta), np.degrees(phi), DATE)
    up = r / RADIUS
    east = np.array([-np.sin(phi), np.cos(phi), 0.0])
    south = np.cross(east, up)
    b = sum(float(part.ravel()[0]) * axis for part, axis in zip(parts, (up, south, east)))
    return r, v, b


def body_axes(r, v):
    """Rows: along the track, across it, and down; the matrix that multiplies components."""
    down = -r / np.linalg.norm(r)
    across = np.cross(down, v)
    across /= np.linalg.norm(across)
    return np.array([np.cross(across, down), across, down])


ORBIT = [orbit(argument) for argument in np.linspace(0, 2 * np.pi, 120, endpoint=False)]


def motional(v, b):
    """v×B in mV/m for km/s and nT: 1e3 · 1e-9 V/m = 1e-3 mV/m."""
    return np.cross(v, b) * 1e-3


def test_the_model_is_the_one_named():
    """IGRF-14's leading coefficient of 2025, g₁⁰ = −29350.0 nT (from memory), is in the field.

    B_r = Σ (n+1)(a/r)ⁿ⁺² g P_n, so 2 g₁⁰/3 is the mean of B_r cos θ over the reference sphere.
    """
    nodes, weights = np.polynomial.legendre.leggauss(20)
    longitudes = np.linspace(-180, 180, 40, endpoint=False)
    theta, phi = np.meshgrid(np.degrees(np.arccos(nodes)), longitudes, indexing="ij")
    radial = ppigrf.igrf_gc(6371.2, theta, phi, DATE)[0].reshape(theta.shape)
    mean = np.sum(weights * nodes * radial.mean(axis=1)) / 2
    assert mean * 3 / 2 == pytest.approx(-29350.0, abs=0.1)


def test_the_motional_field_along_the_orbit(service):
    questions = [{"e": [0, 0, 0], "b": list(b), "velocity": list(v), "units": UNITS} for _, v, b in ORBIT]
    for (_, v, b), reply in zip(ORBIT, service.post_all(questions)):
        expected = motional(v, b)
        size = 1e-3 * np.linalg.norm(v) * np.linalg.norm(b)
        assert 50 < size < 500, "a low orbit crosses 18,000 to 60,000 nT at 7.3 km/s"
        assert np.linalg.norm(reply.json["e"] - expected) <= RELATIVISTIC * np.linalg.norm(expected) + 4e-16 * size
        assert np.linalg.norm(np.array(reply.json["b"]) - b) <= RELATIVISTIC * np.linalg.norm(b)


def test_the_same_on_the_axes_of_the_body(service):
    """A boost to the probe's motion, then the turn to its axes (along track, across, down)."""
    for r, v, b in ORBIT[::10]:
        m = body_axes(r, v)
        answer = service.ask({"e": [0, 0, 0], "b": list(b), "units": UNITS, "steps": [
            {"boost": {"velocity": list(v)}}, {"rotate": {"matrix": m.tolist()}}]})
        expected = m @ motional(v, b)
        assert np.linalg.norm(answer["e"] - expected) <= 1e-9 * np.linalg.norm(expected)
        assert abs(answer["e"][0]) <= 1e-9 * np.linalg.norm(expected), "nothing along the motion"


def test_subtracting_the_motional_field_from_a_reading_on_the_probe(service):
    """The everyday use: the probe reads v×B and a small ambient field; the ambient field comes back.

    `inverse` takes the probe's velocity as it is known on the ground and leads from probe to ground.
    """
    ambient = np.array([0.5, -1.5, 0.25])  # mV/m, invented
    for _, v, b in ORBIT[::10]:
        answer = service.ask({"e": list(ambient + motional(v, b)), "b": list(b), "units": UNITS,
                              "velocity": list(v), "inverse": True})
        size = np.linalg.norm(motional(v, b))
        assert np.linalg.norm(answer["e"] - ambient) <= 2 * RELATIVISTIC * size


def test_the_example_of_the_readme(service):
    """Rounded as the README shows it: 7.3 km/s over the equator, northbound, IGRF-14 at 2025.0."""
    _, v, b = ORBIT[0]
    v, b = np.round(v, 3), np.round(b, 1)
    answer = service.ask({"e": [0, 0, 0], "b": list(b), "velocity": list(v), "units": UNITS})
    assert answer["e"] == pytest.approx(list(motional(v, b)), rel=RELATIVISTIC)
