"""Every form of a rotation against scipy.spatial.transform.Rotation, which knows nothing of frames.

The stated turn R carries the current axes onto the next ones (right-hand rule), so components
become R⁻¹ v: scipy's `Rotation.inv().apply`. scipy works in doubles; 20 u covers its rounding.
"""

import math
import random
import re

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

import ways

E, B = [0.3, -1.2, 2.5], [4.0e-5, -1.0e-5, 2.0e-5]
CLOSE = 20 * 2.0**-53


def assert_turned(service, form, turn, units=None):
    """The service turns both vectors as scipy does and reports the same quaternion, w ≥ 0."""
    answer = service.ask({"e": E, "b": B, "rotation": form} | ({"units": units} if units else {}))
    for name, vector in (("e", E), ("b", B)):
        off = np.linalg.norm(answer[name] - turn.inv().apply(vector))
        assert off <= CLOSE * np.linalg.norm(vector), f"{name} of {form}"
    q = [answer["net"]["rotation"][name] for name in "xyzw"]
    assert q[3] >= 0
    # q and −q are one turn; at w = 0 either sign is right.
    theirs = turn.as_quat(canonical=True)
    assert min(np.linalg.norm(q - theirs), np.linalg.norm(q + theirs)) <= CLOSE


def test_turning_the_axes_90_degrees_about_z_makes_the_old_y_the_new_x(service):
    """The sense of a turn in one line."""
    answer = service.ask({"e": [0, 1, 0], "b": [1, 0, 0], "units": {"angle": "deg"},
                          "rotation": {"axis": [0, 0, 1], "angle": 90}})
    assert answer["e"] == pytest.approx([1, 0, 0], abs=1e-16)
    assert answer["b"] == pytest.approx([0, -1, 0], abs=1e-16)


@pytest.mark.parametrize("unit", ["rad", "deg"])
def test_axis_and_angle(service, unit):
    rng = random.Random(f"axis {unit}")
    for _ in range(100):
        form = ways.axis_angle(rng)
        axis = np.array(form["axis"]) / np.linalg.norm(form["axis"])
        angle = form["angle"] if unit == "rad" else math.radians(form["angle"])
        assert_turned(service, form, Rotation.from_rotvec(angle * axis), {"angle": unit})


def test_quaternion(service):
    rng = random.Random("quaternion")
    for _ in range(100):
        q = ways.quaternion(rng)["quaternion"]
        assert_turned(service, {"quaternion": q}, Rotation.from_quat([q[name] for name in "xyzw"]))


def test_a_quaternion_and_its_negative_are_the_same_turn(service):
    q = ways.quaternion(random.Random("sign"))["quaternion"]
    one, other = (
        service.ask({"e": E, "b": B, "rotation": {"quaternion": {n: s * x for n, x in q.items()}}})
        for s in (1, -1)
    )
    assert one["e"] == other["e"] and one["net"] == other["net"]


def test_matrix_multiplies_components(service):
    """E' = M E: the matrix of the question is R⁻¹, row i the next axis i on the current axes."""
    rng = random.Random("matrix")
    for _ in range(100):
        m = ways.matrix(rng, 0)["matrix"]
        assert_turned(service, {"matrix": m}, Rotation.from_matrix(m).inv())


@pytest.mark.parametrize("about", ["moving", "fixed"])
@pytest.mark.parametrize("axes", ways.SEQUENCES)
def test_euler_angles(service, axes, about):
    """scipy writes turns about moving axes in capitals."""
    rng = random.Random(f"{axes} {about}")
    for _ in range(5):
        angles = [rng.uniform(-400, 400) for _ in range(3)]
        turn = Rotation.from_euler(axes.upper() if about == "moving" else axes, angles, degrees=True)
        form = {"euler": {"axes": axes, "angles": angles, "about": about}}
        assert_turned(service, form, turn, {"angle": "deg"})


def test_a_chain_of_turns_goes_about_the_axes_as_they_have_become(service):
    """Each step counts on the axes that the one before has led to: R = R₁R₂R₃."""
    rng = random.Random("chain")
    for _ in range(50):
        quaternions = [ways.quaternion(rng, 0)["quaternion"] for _ in range(3)]
        turn = Rotation.identity()
        for q in quaternions:
            turn = turn * Rotation.from_quat([q[name] for name in "xyzw"])
        answer = service.ask({"e": E, "b": B, "steps": [{"rotate": {"quaternion": q}} for q in quaternions]})
        assert np.linalg.norm(answer["e"] - turn.inv().apply(E)) <= 2 * CLOSE * np.linalg.norm(E)


def test_an_attitude_from_a_navigation_unit_brings_body_readings_to_the_ground(service):
    """Yaw, pitch, roll (z, y, x about moving axes, common practice, ISO 1151-2 from memory) turn the
    ground axes onto the body's; `inverse` takes a body reading back to the ground."""
    yaw_pitch_roll = [135.0, -4.0, 20.0]
    form = {"euler": {"axes": "zyx", "angles": yaw_pitch_roll, "about": "moving"}, "inverse": True}
    answer = service.ask({"e": E, "b": B, "units": {"angle": "deg"}, "rotation": form})
    body_to_ground = Rotation.from_euler("ZYX", yaw_pitch_roll, degrees=True)
    assert np.linalg.norm(answer["e"] - body_to_ground.apply(E)) <= CLOSE * np.linalg.norm(E)


def test_a_turn_alone_needs_only_the_field_it_turns(service):
    """Without B, E is still turned; the rest is null, with a notice."""
    answer = service.ask({"e": E, "b": None, "rotation": {"axis": [0, 0, 1], "angle": 1}})
    turn = Rotation.from_rotvec([0, 0, 1])
    assert np.linalg.norm(answer["e"] - turn.inv().apply(E)) <= CLOSE * np.linalg.norm(E)
    assert answer["b"] == [None, None, None] and answer["notices"]


@pytest.mark.parametrize("off, noticed", [(0, False), (4e-10, False), (1e-8, True), (0.9e-6, True)])
def test_rounded_decimals_are_made_good_with_a_notice(service, off, noticed):
    """| |q|² − 1 | up to 2e-6 is the rounding of six decimals; past 1e-9 it is mentioned."""
    q = {"w": 0.6 * (1 + off), "x": 0.0, "y": 0.8 * (1 + off), "z": 0.0}
    answer = service.ask({"e": E, "b": B, "rotation": {"quaternion": q}})
    assert bool(answer["notices"]) == noticed
    assert answer["net"]["rotation"]["w"] == pytest.approx(0.6, rel=1e-15)


@pytest.mark.parametrize("form, said", [
    ({"quaternion": {"w": 0.6, "x": 0, "y": 0.8, "z": 0.01}}, "0.0001"),
    ({"matrix": [[1, 0, 0], [0, 1, 0], [0, 0, 1.00001]]}, "0.00002"),
    ({"matrix": [[1, 0, 0], [0, 1, 0], [0, 0, -1]]}, "-1"),
])
def test_anything_else_is_refused_with_its_measured_departure(service, form, said):
    """`said` is how far it is off: |q|² − 1, |MMᵀ − 1|max, or the determinant of a mirrored one."""
    reply = service.post({"e": E, "b": B, "rotation": form})
    assert reply.status == 422
    (fault,) = reply.json["errors"]
    numbers = [float(x) for x in re.findall(r"-?\d+\.?\d*(?:e-?\d+)?", fault["detail"])]
    assert fault["code"] == "not_a_rotation"
    assert any(x == pytest.approx(float(said), rel=0.02) for x in numbers), fault["detail"]
