"""What one field is: tensor, invariants, energy, stress and the frame where E ∥ B.

Jackson eqs. 11.137–11.140 (tensor and dual), 6.107–6.120 (energy, stress); Landau and Lifshitz
§ 25 (invariants, parallel frame). All take E in V/m and cB in V/m unless said otherwise.
"""

from mpmath import mp, mpf

from .algebra import cross, dot, norm, scale
from .units import C

def tensor(e_over_c, b):
    """F^{μν}, signature (+ − − −): F^{i0} = E_i/c, F^{ij} = −ε_{ijk} B_k, in tesla."""
    (ex, ey, ez), (bx, by, bz) = e_over_c, b
    return [
        [mpf(0), -ex, -ey, -ez],
        [ex, mpf(0), -bz, by],
        [ey, bz, mpf(0), -bx],
        [ez, -by, bx, mpf(0)],
    ]


def dual(e_over_c, b):
    """The dual, by Jackson's replacement E/c → B, B → −E/c."""
    return tensor(b, scale(-1, e_over_c))


def lower(contravariant):
    """Both indices lowered with diag(1, −1, −1, −1)."""
    sign = [1, -1, -1, -1]
    return [[sign[i] * sign[j] * contravariant[i][j] for j in range(4)] for i in range(4)]


def vectors(contravariant):
    """(E/c, B) of a tensor."""
    f = contravariant
    return [f[1][0], f[2][0], f[3][0]], [f[3][2], f[1][3], f[2][1]]


def invariants(e, cb):
    """(E² − c²B², E·cB), both in V²/m²."""
    return dot(e, e) - dot(cb, cb), dot(e, cb)


def energy(e, b, mu_0):
    """Energy density in J/m³, Poynting vector in W/m², Maxwell stress in Pa (tension positive).

    Of E in V/m and B in T; `mu_0` in N/A², and ε₀ = 1/(μ₀c²).
    """
    epsilon_0 = 1 / (mu_0 * C**2)
    density = (epsilon_0 * dot(e, e) + dot(b, b) / mu_0) / 2
    poynting = scale(1 / mu_0, cross(e, b))
    stress = [
        [epsilon_0 * e[i] * e[j] + b[i] * b[j] / mu_0 - (i == j) * density for j in range(3)]
        for i in range(3)
    ]
    return density, poynting, stress


def parallel_beta(e, cb):
    """β along E×B with E' ∥ B': V/(1+V²) = E×cB/(E²+c²B²) (Landau and Lifshitz, problem of § 25).

    The quadratic is solved for the root below 1; None for a null field.
    """
    s, u = cross(e, cb), dot(e, e) + dot(cb, cb)
    size = norm(s)
    if size == 0:
        return [mpf(0)] * 3
    if 2 * size >= u:
        return None
    return scale(2 / (u + mp.sqrt(u * u - 4 * size * size)), s)
