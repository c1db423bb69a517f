"""Published results, reproduced through HTTP. The source stands at each.

Attributions and equation numbers are from memory unless "CODATA 2022" is named, whose values are
those of NIST SP 961 (May 2024). Digits beyond the printed ones were recomputed at 100 digits.
Where a field is said in Gaussian units the test takes E = c·(number) V/m and B = (number) T, so that
E and cB have the printed proportions without rounding.
"""

import math

import pytest

C = 299792458.0
X, Y, Z, ZERO = [1, 0, 0], [0, 1, 0], [0, 0, 1], [0, 0, 0]


def near(value, rel=1e-15, size=None):
    """Within `rel` of the size of the whole vector."""
    values = value if isinstance(value, list) else [value]
    return pytest.approx(value, rel=0, abs=rel * (size or math.hypot(*values)))


def gaussian(e, b, **way):
    """A question with E and cB in the given proportion."""
    return {"e": [C * x for x in e], "b": b, **way}


def fields(answer):
    """E'/c and B', both in tesla."""
    return [x / C for x in answer["e"]], answer["b"]


def test_jackson_11_149_along_an_axis(service):
    """J. D. Jackson, Classical Electrodynamics, 3rd ed., § 11.10, eq. 11.148: β = 0.6 along x."""
    e, b = fields(service.ask(gaussian([1, 2, 3], [4, 5, 6], boost={"beta": [0.6, 0, 0]})))
    assert e == near([1, -2, 7.5]) and b == near([4, 8.5, 6])


def test_jackson_11_149_in_any_direction(service):
    """Jackson § 11.10, eq. 11.149: β = (1/3, −1/2, 1/6)."""
    answer = service.ask(gaussian([1, 2, 3], [4, 5, 6], boost={"beta": [1 / 3, -1 / 2, 1 / 6]}))
    e, b = fields(answer)
    assert answer["net"]["gamma"] == near(1.27920429813366261)
    assert e == near([-3.58452584974056844, 0.792973372965228322, 8.54797181837682184])
    assert b == near([7.50191140075117414, 7.40219557998915178, 6.20276393846510707])
    assert answer["invariants"]["e2_minus_c2b2"] / C**2 == near(-63)
    assert answer["invariants"]["e_dot_cb"] / C**2 == near(32)


def test_field_of_a_moving_point_charge(service):
    """Jackson eq. 11.154; Purcell and Morin, Electricity and Magnetism, 3rd ed., § 5.6, at β = 0.8.

    In the charge's own frame the field is Coulomb's; a point at (x, y) beside the passing charge
    lies there at (γx, y). Units of kq/r².
    """
    gamma = 1 / 0.6

    def passing(x, y):
        x *= gamma
        r = math.hypot(x, y)
        question = {"e": [x / r**3, y / r**3, 0], "b": ZERO, "boost": {"beta": [-0.8, 0, 0]}}
        return math.hypot(*service.ask(question)["e"])

    assert passing(0, 1) / passing(1, 0) == near(4.62962962962962963)
    assert passing(math.sqrt(0.5), math.sqrt(0.5)) == near(0.642006066272646106)


def test_frame_of_parallel_fields_at_60_degrees(service):
    """L. D. Landau and E. M. Lifshitz, The Classical Theory of Fields, § 25: E = cB at 60°."""
    question = gaussian(X, [0.5, math.sqrt(0.75), 0], velocity=ZERO, include=["parallel_frame"])
    frame = service.ask(question)["parallel_frame"]
    assert frame["rapidity"] == near(0.658478948462408354)
    assert math.tanh(frame["rapidity"]) == near(0.577350269189625765)
    assert frame["e_parallel"] / C == near(0.707106781186547524)
    assert frame["b_parallel"] == near(0.707106781186547524)


def test_frame_without_an_electric_field(service):
    """Landau and Lifshitz § 25: E = 0.6 across cB = 1 vanishes at β = 0.6, and leaves cB' = 0.8."""
    question = gaussian([0.6, 0, 0], Y, velocity=ZERO, include=["parallel_frame"])
    frame = service.ask(question)["parallel_frame"]
    assert frame["rapidity"] == near(math.atanh(0.6))
    assert frame["direction"] == near(Z)
    assert frame["e_parallel"] / C < 1e-15 and abs(frame["b_parallel"]) == near(0.8)


@pytest.mark.parametrize("beta, ratio", [([0.6, 0, 0], 0.5), ([-0.6, 0, 0], 2), ([0, 0.6, 0], 1.25)])
def test_doppler_amplitude_of_a_plane_wave(service, beta, ratio):
    """Jackson § 11.3, eq. 11.29 to 11.30: the amplitude follows the frequency, ω' = γω(1 − n·β)."""
    e, b = fields(service.ask(gaussian(Y, Z, boost={"beta": beta})))
    assert math.hypot(*e) == near(ratio) and math.hypot(*b) == near(ratio)


def test_stellar_aberration(service):
    """Annual aberration at 29784.7 m/s: 20.4926″ (the constant of aberration, IAU 1976: 20.49552″
    for the Earth's mean orbital speed). A star across the motion; the Poynting vector tilts."""
    wave = gaussian(X, Y, velocity=[29784.7, 0, 0], include=["energy"])
    s = service.ask(wave)["energy"]["poynting"]
    arcseconds = math.degrees(math.atan2(-s[0], s[2])) * 3600
    assert arcseconds == near(20.4926282192684647)


def test_thomas_wigner_rotation(service):
    """E. P. Wigner, Ann. Math. 40 (1939) 149; 0.6 along x, then 0.6 along y: 2 atan(1/9)."""
    net = service.ask({"e": X, "b": ZERO, "steps": [
        {"boost": {"beta": [0.6, 0, 0]}}, {"boost": {"beta": [0, 0.6, 0]}}]})["net"]
    assert net["wigner_angle"] == near(0.221314442347791293)
    assert net["beta"] == near([0.6, 0.48, 0]) and net["gamma"] == near(1.5625)
    q = net["rotation"]
    assert 2 * math.atan2(q["z"], q["w"]) == near(-0.221314442347791293)


def test_addition_of_velocities(service):
    """A. Einstein, Ann. Phys. 17 (1905) 891, § 5: 0.5 c and 0.5 c make 0.8 c."""
    half = {"boost": {"beta": [0.5, 0, 0]}}
    net = service.ask({"e": X, "b": ZERO, "steps": [half, half]})["net"]
    assert net["beta"] == near([0.8, 0, 0]) and net["velocity"] == near([0.8 * C, 0, 0])


def test_wien_filter(service):
    """Common practice: ions of v = E/B pass crossed fields; they see no electric field at all."""
    answer = service.ask({"e": [0, 0, -3e4], "b": [0, 0.125, 0], "velocity": [2.4e5, 0, 0]})
    assert answer["e"] == [0, 0, 0]


def test_moving_capacitor(service):
    """D. J. Griffiths, Introduction to Electrodynamics, 4th ed., § 12.3.2: E = 1 across β = 0.6."""
    e, b = fields(service.ask(gaussian(Y, ZERO, boost={"beta": [0.6, 0, 0]})))
    assert e == near([0, 1.25, 0]) and b == near([0, 0, -0.75])


@pytest.mark.parametrize("b, ratio", [(ZERO, 2.125), ([0, 0, -1], 4)])
def test_energy_density_seen_in_motion(service, b, ratio):
    """Landau and Lifshitz § 6 and § 33 (T⁰⁰): cosh 2η for a transverse E, e^2η for a head-on wave."""
    question = gaussian(Y, b, include=["energy"])
    rest = service.ask(question | {"velocity": ZERO})["energy"]["density"]
    seen = service.ask(question | {"boost": {"beta": [0.6, 0, 0]}})["energy"]["density"]
    assert seen / rest == near(ratio)


def test_motional_field_of_a_low_orbit(service):
    """Common practice (tethers, double probes): 7.5 km/s across 50 µT is 0.375 V/m, times γ."""
    answer = service.ask({"e": ZERO, "b": [0, 0, 50], "velocity": [7.5, 0, 0],
                          "units": {"b": "uT", "velocity": "km/s"}})
    assert answer["e"] == near([0, -0.375000000117349829, 0])
