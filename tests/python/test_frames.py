"""Named frames: tracks, spins and sensors against scipy, published fields and common practice."""

import hashlib
import math
import random
import subprocess

import numpy as np
import pytest
from scipy.spatial.transform import Rotation, Slerp

from payload import DEMO, Payload, readings
from service import BINARY, Service, by_url

EPOCH = 'epoch = "T0"\n'


def rotation(net):
    return Rotation.from_quat([net["rotation"][name] for name in "xyzw"])


def angle_between(a, b):
    return (a.inv() * b).magnitude()


def test_attitudes_between_samples_are_those_of_scipys_slerp(start):
    """Also which way round: the attitude carries the parent's axes onto the frame's."""
    rng = random.Random("slerp")
    times, attitudes = [0.0], [Rotation.random(rng=np.random.default_rng(1))]
    for _ in range(60):
        axis = np.array([rng.gauss(0, 1) for _ in range(3)])
        turn = Rotation.from_rotvec(axis / np.linalg.norm(axis) * rng.uniform(0, 1.57))  # up to 90 degrees
        attitudes.append(attitudes[-1] * turn)
        times.append(times[-1] + rng.uniform(0.2, 3))
    track = "time,qw,qx,qy,qz\n"
    for t, attitude in zip(times, attitudes):
        # Either of the two quaternions of an attitude may stand in a track.
        x, y, z, w = attitude.as_quat() * rng.choice([1, -1])
        track += f"{t!r},{float(w)!r},{float(x)!r},{float(y)!r},{float(z)!r}\n"
    service = start(f'{EPOCH}[frames.ground]\n[frames.craft]\nparent = "ground"\ntrack = "track.csv"\n', track=track)
    slerp = Slerp(times, Rotation.concatenate(attitudes))
    e = [0.3, -1.2, 2.5]
    for t in [*times, *(rng.uniform(0, times[-1]) for _ in range(200))]:
        expected = slerp(t)
        net = service.get(f"/v1/frames/ground/to/craft?time={t!r}").json["net"]
        assert angle_between(rotation(net), expected) < 4e-15
        answer = service.ask({"e": e, "from": "ground", "to": "craft", "time": t})
        assert answer["e"] == pytest.approx(expected.inv().apply(e), abs=1e-14)
        back = service.ask({"e": e, "from": "craft", "to": "ground", "time": t})
        assert back["e"] == pytest.approx(expected.apply(e), abs=1e-14)


def test_velocities_between_samples_are_linear(start):
    track = "time,vx,vy,vz\n2031-03-02T05:10:00Z,100,-200,300\n2031-03-02T05:10:08Z,140,-360,-20\n"
    service = start('[frames.ground]\n[frames.craft]\nparent = "ground"\ntrack = "track.csv"\n', track=track)
    for time, velocity in [
        ("2031-03-02T05:10:00Z", [100, -200, 300]),
        ("2031-03-02T06:10:02.000000000000000000+01:00", [110, -240, 220]),
        ("2031-03-02T05:10:08.000Z", [140, -360, -20]),
    ]:
        path = f"/v1/frames/ground/to/craft?time={time.replace('+', '%2B')}"
        assert service.get(path).json["net"]["velocity"] == pytest.approx(velocity, rel=1e-15)


def test_a_line_integral_from_pole_to_equator_gives_the_corotation_voltage(start):
    """ωB₀R² = 92 347 V for the dipole of the Earth (formula recomputed, values from memory; H. Alfvén
    and C.-G. Fälthammar, Cosmical Electrodynamics, treat it).

    At rest with the turning sphere E vanishes; outside, E = −v×B, along the meridian
    2ωB₀R sin θ cos θ at the angle θ from the pole.
    """
    omega, b0, radius = 7.2921159e-5, 3.12e-5, 6.371e6
    nodes, weights = np.polynomial.legendre.leggauss(12)
    angles = ((nodes + 1) * math.pi / 4).tolist()
    text = f"{EPOCH}[frames.space]\n"
    for i, angle in enumerate(angles):
        text += (f'[frames.p{i}]\nparent = "space"\nposition = [{radius * math.sin(angle)!r}, 0, '
                 f"{radius * math.cos(angle)!r}]\nturning = {{ angular_velocity = [0, 0, {omega}], epoch = 0 }}\n")
    service = start(text)
    voltage = 0.0
    # A day later the point has come round; at any other time it stands elsewhere on its circle.
    for time in (0, 3000.0):
        voltage = 0.0
        for i, (angle, weight) in enumerate(zip(angles, weights)):
            sin, cos = math.sin(angle), math.cos(angle)
            south = np.array([cos, 0, -sin])
            b = -2 * b0 * cos * np.array([sin, 0, cos]) - b0 * sin * south
            answer = service.ask({"e": [0, 0, 0], "b": list(b), "from": f"p{i}", "to": "space", "time": time})
            turned = Rotation.from_rotvec([0, 0, omega * time]).apply(south)
            voltage += weight * math.pi / 4 * radius * float(turned @ answer["e"])
        assert voltage == pytest.approx(92347.1223515542728, rel=1e-11)


def test_a_radial_integral_over_a_turning_disc_gives_its_voltage(start):
    """Homopolar disc: ½BωR² = π/2 V at 1 T, 50 rev/s and 0.1 m (M. Faraday; any textbook, e.g.
    Jackson, Classical Electrodynamics, ch. 5, from memory)."""
    nodes, weights = np.polynomial.legendre.leggauss(4)
    radii = ((nodes + 1) * 0.05).tolist()
    text = f'{EPOCH}[units]\nangular_velocity = "circ/s"\nangle = "deg"\n[frames.lab]\n'
    for i, radius in enumerate(radii):
        text += (f'[frames.r{i}]\nparent = "lab"\nposition = [{radius!r}, 0, 0]\n'
                 "turning = { angular_velocity = [0, 0, 50], epoch = 0, phase = 20 }\n")
    service = start(text)
    for time in (0, 0.0123, 1e6 + 0.25):
        e = [service.ask({"e": [0, 0, 0], "b": [0, 0, 1], "from": "lab", "to": f"r{i}", "time": time})["e"]
             for i in range(len(radii))]
        assert sum(w * 0.05 * x for w, (x, _, _) in zip(weights, e)) == pytest.approx(math.pi / 2, rel=1e-13)
        assert all(abs(y) < 1e-13 and abs(z) < 1e-13 for _, y, z in e)


def test_the_despun_field_of_a_two_axis_probe_is_constant(start):
    """Common practice with double probes: E in the spin plane is measured, the rest follows from
    E·B = 0, and what is left of the spin after despinning is a fault of the calibration."""
    service = start(
        '[units]\nangular_velocity = "deg/s"\nangle = "deg"\n[frames.inertial]\n[frames.spacecraft]\n'
        'parent = "inertial"\nturning = { angular_velocity = [0, 0, 90], epoch = 2031-03-02T05:10:00Z, phase = 12 }\n'
        '[frames.probe]\nparent = "spacecraft"\nsteps = [{ rotate = { axis = [0, 0, 1], angle = 33 } }]\n'
        'sensor.e = { axes = ["x", "y"], matrix = [[0.5, 0, 0], [0, -0.25, 0], [0, 0, 1]], offset = [7, -3, 0] }\n')
    e, b = np.array([3.0, -1.0, 0.5]), np.array([2e-5, 3e-5, -6e-5])
    assert e @ b == pytest.approx(0, abs=1e-20)
    for n in range(60):
        seconds = n * 1.37
        turn = Rotation.from_euler("z", 12 + 33 + 90 * seconds, degrees=True)
        x, y, _ = turn.inv().apply(e)
        minute, second = divmod(seconds, 60)
        answer = service.ask({
            "e": [2 * x + 7, -4 * y - 3, None], "b": list(turn.inv().apply(b)), "from": "probe", "to": "inertial",
            "time": f"2031-03-02T05:{10 + int(minute)}:{second:09.6f}Z",
            "assume": {"e_dot_b_zero": {"min_angle": 15}}, "units": {"angle": "deg"},
        })
        assert answer["e"] == pytest.approx(e, rel=1e-13)
        assert answer["b"] == pytest.approx(b, rel=1e-13)
        assert "e_dot_b_assumed" in [notice["code"] for notice in answer["notices"]]


def test_the_demonstration_agrees_with_an_independent_computation(demo):
    payload = Payload()
    for time, e, b in readings():
        answer = demo.ask({"from": "boom", "to": "ground", "time": time, "e": e, "b": b,
                           "assume": {"e_dot_b_zero": {"min_angle": 15}}, "units": {"angle": "deg"}})
        for name, exact in zip("eb", payload.to_ground(time, e, b)):
            exact = [float(x) for x in exact]
            off = np.linalg.norm(np.subtract(answer[name], exact))
            assert off <= 1e-13 * np.linalg.norm(exact), f"{name} at {time}"
        # What make.py put there, to the rounding of the telemetry and the steps of the track.
        assert answer["e"] == pytest.approx([12, 20, 6], abs=0.01)
        assert answer["b"] == pytest.approx([1500, 15000, -53000], abs=8)


def test_a_url_asks_the_same(demo):
    question = {"from": "boom", "to": "ground", "time": 131.25, "e": [0.01, 0.02, None], "b": [-1778, -8840, -27539],
                "assume": {"e_dot_b_zero": {"min_angle": 15}}, "units": {"angle": "deg"}}
    path = by_url(question | {"e": None}).replace("e=null", "e=0.01,0.02,")
    assert demo.get(path).json == demo.ask(question)


def test_provenance_is_the_hash_of_the_files_one_after_the_other(demo, tmp_path):
    both = b"".join((DEMO / name).read_bytes() for name in ("frames.toml", "flight.csv"))
    expected = "sha256:" + hashlib.sha256(both).hexdigest()
    assert demo.get("/v1/frames").json["provenance"]["frames"] == expected
    # In every answer, also one that names no frame.
    question = {"e": [0, 1, 0], "b": [0, 0, 1], "velocity": [100, 0, 0]}
    assert demo.ask(question)["provenance"]["frames"] == expected
    with Service(tmp_path / "log.txt", "--frames", DEMO / "frames.toml") as other:
        for path in ("/v1/frames", "/v1/frames/nose/to/ground?time=99", by_url(question)):
            one, two = demo.get(path), other.get(path)
            assert (one.body, one.headers["etag"]) == (two.body, two.headers["etag"])
        assert demo.get(path, If_None_Match=one.headers["etag"]).status == 304


def test_the_catalogue_describes_itself(demo):
    frames = {frame["name"]: frame for frame in demo.get("/v1/frames").json["frames"]}
    assert list(frames) == ["ground", "payload", "spinning", "boom", "nose"]
    assert frames["ground"]["parent"] is None and frames["ground"]["children"] == ["payload"]
    assert frames["payload"]["motion"] == "track" and frames["payload"]["valid"] == {"from": 60, "to": 360}
    assert frames["spinning"]["motion"] == "turning" and frames["boom"]["motion"] == "fixed"
    assert frames["boom"]["sensor"]["e"]["axes"] == ["x", "y"]
    for name, frame in frames.items():
        assert demo.get(f"/v1/frames/{name}").json == frame
    assert demo.get("/v1/frames/mast").json["type"] == "/problems/not_found"
    assert demo.get("/v1/frames/boom/to/mast?time=99").json["type"] == "/problems/not_found"


def test_a_service_without_a_catalogue_says_so(service):
    assert service.get("/v1/frames").json["frames"] == []
    reply = service.get("/v1/frames/boom")
    assert reply.status == 404 and "--frames" in reply.json["detail"]


@pytest.mark.parametrize("code, more, place", [
    ("unknown_frame", {"from": "bom"}, "/from"),
    ("time_needed", {"time": None}, "/time"),
    ("time_outside_track", {"time": 59.5}, "/time"),
    ("time_outside_track", {"time": 360.5}, "/time"),
    ("wrong_time", {"time": "2031-03-02T05:12:00Z"}, "/time"),
    ("axis_not_measured", {"e": [1, 2, 3]}, "/e/2"),
    ("conflicting_fields", {"velocity": [1, 0, 0]}, ""),
])
def test_a_fault_of_names_and_times(demo, code, more, place):
    question = {"from": "boom", "to": "ground", "time": 120, "e": [0, 1, None], "b": [0, 0, 1]} | more
    (fault,) = demo.post(question).json["errors"]
    assert (fault["code"], fault["pointer"]) == (code, place)


def test_the_transformation_alone_refuses_what_a_question_does(demo):
    for query, code in [("", "time_needed"), ("?time=1", "time_outside_track"), ("?time=soon", "wrong_time"),
                        ("?when=99", "unknown_field")]:
        assert demo.get(f"/v1/frames/boom/to/ground{query}").json["type"] == f"/problems/{code}"
    fixed = demo.get("/v1/frames/boom/to/nose").json
    assert fixed["time"] is None and fixed["net"]["gamma"] == 1


def run(*arguments):
    return subprocess.run([BINARY, *arguments], capture_output=True, text=True, timeout=30, stdin=subprocess.DEVNULL)


def test_check_prints_the_tree():
    done = run("check", DEMO / "frames.toml")
    assert (done.returncode, done.stderr) == (0, "")
    lines = done.stdout.splitlines()
    assert lines[0].startswith("ground: ") and lines[1].startswith("└─ payload: ")
    assert lines[3].startswith("      ├─ boom: ") and lines[4].startswith("      └─ nose: ")
    assert lines[5].startswith("5 frames, sha256:")


def test_a_wrong_catalogue_is_never_served(tmp_path):
    """Exit code 2, and every fault with file, line and frame."""
    wrong = tmp_path / "frames.toml"
    wrong.write_text('[frames.a]\n[frames.b]\nparent = "c"\nsteps = [{ boost = { beta = [1, 0, 0] } }]\n')
    for arguments in (("check", wrong), ("serve", "--listen", "127.0.0.1:0", "--frames", wrong)):
        done = run(*arguments)
        assert (done.returncode, done.stdout) == (2, "")
        assert f'{wrong}:3: frame "b": ' in done.stderr and "[unknown_parent]" in done.stderr
        assert f'{wrong}:4: frame "b": steps.0.boost.beta: ' in done.stderr and "[faster_than_light]" in done.stderr
