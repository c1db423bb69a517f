"""Published results that rest on measured constants. CODATA 2022 is NIST SP 961 (May 2024);
other attributions are from memory. Digits beyond the printed ones were recomputed at 100 digits.
CODATA prints 11 digits of the electron's mass and of its energy: which of the two a recomputation
starts from shows in the 12th, hence `ELEVEN_DIGITS`.
"""

import math

import pytest

C = 299792458.0
ELEVEN_DIGITS = 1e-11
X, ZERO = [1, 0, 0], [0, 0, 0]


def near(value, rel=2e-15):
    return pytest.approx(value, rel=rel, abs=0)


def net(service, **boost):
    """The net transformation of one boost along x; energies in MeV."""
    return service.ask({"e": X, "b": ZERO, "units": {"energy": "MeV"},
                        "boost": {"direction": X, **boost}})["net"]


@pytest.mark.parametrize("name, value, uncertainty", [
    ("speed_of_light", 299792458, 0),
    ("elementary_charge", 1.602176634e-19, 0),
    ("planck_constant", 6.62607015e-34, 0),
    ("electric_constant", 8.8541878188e-12, 0.0000000014e-12),
    ("magnetic_constant", 1.25663706127e-6, 0.00000000020e-6),
    ("impedance_of_vacuum", 376.730313412, 0.000000059),
    ("fine_structure_constant", 7.2973525643e-3, 0.0000000011e-3),
    ("electron_mass", 9.1093837139e-31, 0.0000000028e-31),
    ("electron_rest_energy", 0.51099895069, 0.00000000016),
    ("muon_rest_energy", 105.6583755, 0.0000023),
    ("proton_rest_energy", 938.27208943, 0.00000029),
    ("deuteron_rest_energy", 1875.61294500, 0.00000058),
    ("alpha_rest_energy", 3727.3794118, 0.0000012),
    ("muon_magnetic_moment_anomaly", 1.16592062e-3, 0.00000041e-3),
])
def test_codata_2022(service, name, value, uncertainty):
    """Value and standard uncertainty as printed; the exact ones are those that define the SI."""
    (entry,) = (entry for entry in service.get("/v1/constants").json if entry["name"] == name)
    assert entry["value"] == value
    assert entry["uncertainty"] == near(uncertainty)
    assert entry["unit"]
    assert ("CODATA 2022" if uncertainty else "SI Brochure") in entry["source"]


def test_muon_magic_gamma(service, constants):
    """The g−2 storage rings' γ = √(1 + 1/a): there the electric field leaves the spin alone.

    V. Bargmann, L. Michel, V. L. Telegdi, Phys. Rev. Lett. 2 (1959) 435: the term (a − 1/(γ²−1)) β×E.
    """
    a = constants["muon_magnetic_moment_anomaly"]
    magic = math.sqrt(1 + 1 / a)
    assert magic == near(29.3034353581351754)
    ring = net(service, particle="muon",
               kinetic_energy=(magic - 1) * constants["muon_rest_energy"])
    assert ring["gamma"] == near(magic)  # the muon's energy cancels
    assert a - 1 / math.sinh(ring["rapidity"]) ** 2 == pytest.approx(0, abs=1e-17)


def test_homopolar_disc(service):
    """M. Faraday's disc; common practice: U = ½BωR² for 1 T, 50 rev/s, R = 0.1 m.

    The field on a radius is proportional to r, so its value in the middle times R is the voltage.
    """
    answer = service.ask({"e": ZERO, "b": [0, 0, 1], "units": {"angular_velocity": "circ/s"},
                          "boost": {"angular_velocity": [0, 0, 50], "position": [0.05, 0, 0]}})
    assert answer["e"][0] * 0.1 == near(1.57079632679489662)


def test_corotation_voltage(service):
    """Common practice in magnetospheric physics: ωB₀R², the corotation potential at the equator.

    The field is γ = 1 + 1.2e-12 times larger than ωB₀R.
    """
    radius = 6.371e6
    answer = service.ask({"e": ZERO, "b": [0, 0, 3.12e-5],
                          "boost": {"angular_velocity": [0, 0, 7.2921159e-5], "position": [radius, 0, 0]}})
    assert answer["e"][0] * radius == near(92347.1223515542728, 1.3e-12)


def test_electron_gyrofrequency(service, constants):
    """CODATA 2022: e/(2π mₑ) = 27.9924898 GHz/T; at γ = 2 half of it (Jackson § 12.2, eq. 12.39)."""
    e, m = constants["elementary_charge"], constants["electron_mass"]
    at_rest = e / (2 * math.pi * m)
    assert at_rest == near(27992489834.2605778, ELEVEN_DIGITS)
    gamma = net(service, particle="electron",
                kinetic_energy=constants["electron_rest_energy"])["gamma"]
    assert at_rest / gamma == near(13996244917.1302889, ELEVEN_DIGITS)


def test_impedance_of_vacuum(constants):
    """CODATA 2022: Z₀ = μ₀c = 1/(ε₀c) = 376.730313412 Ω; all printed to 12 digits."""
    impedance = constants["impedance_of_vacuum"]
    assert impedance == near(376.730313412029902, 1e-12)
    assert constants["electric_constant"] == near(8.85418781878932946e-12, 2 * ELEVEN_DIGITS)
    assert constants["magnetic_constant"] * C == near(impedance, 2 * ELEVEN_DIGITS)
    assert 1 / (constants["electric_constant"] * C) == near(impedance, 2 * ELEVEN_DIGITS)


def test_proton_of_7_tev(service, constants):
    """Common practice (LHC design report): γ ≈ 7461, 2.7 m/s slower than light."""
    rest = constants["proton_rest_energy"]
    beam = net(service, particle="proton", kinetic_energy=7e6 - rest)
    assert beam["gamma"] == near(7460.52246342795703, ELEVEN_DIGITS)
    assert 2 * C / (math.exp(2 * beam["rapidity"]) + 1) == near(2.69309841622386002, 2 * ELEVEN_DIGITS)


def test_electron_of_1_mev(service):
    """Common practice (textbook exercise): T = 1 MeV gives β = 0.941."""
    beam = net(service, particle="electron", kinetic_energy=1)
    assert beam["gamma"] == near(2.95695118091223264, ELEVEN_DIGITS)
    assert beam["beta"][0] == near(0.941079227918550571, ELEVEN_DIGITS)


def test_energy_of_crossed_fields(service):
    """Jackson § 6.7, eq. 6.106 and 6.109: E = 1 kV/m across B = 10 µT."""
    energy = service.ask({"e": [1, 0, 0], "b": [0, 10, 0], "units": {"e": "kV/m", "b": "uT"},
                          "velocity": ZERO, "include": ["energy"]})["energy"]
    assert energy["density"] == near(4.42158296876219682e-5, ELEVEN_DIGITS)
    assert energy["poynting"] == pytest.approx([0, 0, 7957.74715564545034], rel=ELEVEN_DIGITS, abs=1e-9)
