"""Boosts: every form of the question as an exact β vector, and what a boost does.

Jackson § 11.3 (eq. 11.98) and § 11.10 (eq. 11.149), Gaussian there: E and cB here.
"""

from mpmath import mp, mpf

from .algebra import add, cross, dot, norm, scale
from .units import C, factor

# Rest energies in MeV: CODATA 2022, "energy equivalent in MeV" (NIST SP 961, May 2024).
REST_ENERGY_MEV = {
    "electron": "0.51099895069",
    "muon": "105.6583755",
    "proton": "938.27208943",
    "deuteron": "1875.61294500",
    "alpha": "3727.3794118",
}


def beta_of(boost, units):
    """The exact β vector of a `boost` object, before its own `inverse`."""
    if "velocity" in boost:
        return scale(1 / mpf(C), units.vector("velocity", boost["velocity"]))
    if "beta" in boost and "direction" not in boost:
        return [mpf(x) for x in boost["beta"]]
    if "angular_velocity" in boost:
        omega = units.vector("angular_velocity", boost["angular_velocity"])
        return scale(1 / mpf(C), cross(omega, units.vector("length", boost["position"])))
    direction = [mpf(x) for x in boost["direction"]]
    return scale(_speed(boost, units) / norm(direction), direction)


def _speed(boost, units):
    if "beta" in boost:
        return mpf(boost["beta"])
    if "rapidity" in boost:
        return mp.tanh(mpf(boost["rapidity"]))
    if "gamma" in boost:
        gamma = mpf(boost["gamma"])
    else:
        gamma = 1 + units.number("energy", boost["kinetic_energy"]) / _rest(boost["particle"], units)
    return mp.sqrt(1 - 1 / gamma**2)


def _rest(particle, units):
    if isinstance(particle, dict):
        return units.number("energy", particle["rest_energy"])
    return mpf(REST_ENERGY_MEV[particle]) * factor("energy", "MeV")


def gamma_of(beta):
    return 1 / mp.sqrt(1 - dot(beta, beta))


def boost_fields(beta, e, cb):
    """Jackson 11.149: E' = γ(E + β×cB) − γ²/(γ+1) β(β·E), cB' = γ(cB − β×E) − γ²/(γ+1) β(β·cB)."""
    gamma = gamma_of(beta)
    along = -(gamma**2) / (gamma + 1)
    return (
        add(scale(gamma, add(e, cross(beta, cb))), scale(along * dot(beta, e), beta)),
        add(scale(gamma, add(cb, cross(e, beta))), scale(along * dot(beta, cb), beta)),
    )


def boost_matrix(beta):
    """Jackson 11.98: the 4×4 matrix on (ct, x, y, z)."""
    gamma, squared = gamma_of(beta), dot(beta, beta)
    if squared == 0:
        return [[mpf(i == j) for j in range(4)] for i in range(4)]
    space = [
        [(i == j) + (gamma - 1) * beta[i] * beta[j] / squared for j in range(3)] for i in range(3)
    ]
    back = scale(-gamma, beta)
    return [[gamma, *back]] + [[back[i], *space[i]] for i in range(3)]
