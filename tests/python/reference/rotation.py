"""Rotations: every form as the exact matrix R that carries the current axes onto the next ones.

H. Goldstein, Classical Mechanics, ch. 4 (Rodrigues' formula, Euler angles); N. J. Higham,
Functions of Matrices, ch. 8 (Newton's iteration for the polar factor).
"""

from mpmath import mp, mpf

from .algebra import cross, inverse3, norm, product, scale, transpose


def matrix_of(rotation, units):
    """R with columns the next axes on the current ones; components become Rᵀ v."""
    if "axis" in rotation:
        return about(rotation["axis"], units.number("angle", rotation["angle"]))
    if "quaternion" in rotation:
        return _quaternion(rotation["quaternion"])
    if "matrix" in rotation:
        # The question's matrix multiplies components, so it is R⁻¹ = Rᵀ.
        return transpose(_nearest_rotation(rotation["matrix"]))
    return _euler(rotation["euler"], units)


def about(axis, angle):
    """Rodrigues: R v = v cos α + (n×v) sin α + n(n·v)(1 − cos α), column by column."""
    n = [mpf(x) for x in axis]
    n = scale(1 / norm(n), n)
    cosine, sine = mp.cos(angle), mp.sin(angle)
    columns = []
    for k in range(3):
        v = [mpf(i == k) for i in range(3)]
        turned = cross(n, v)
        columns.append([v[i] * cosine + turned[i] * sine + n[i] * n[k] * (1 - cosine) for i in range(3)])
    return transpose(columns)


def _quaternion(q):
    """R v = q v q*, Hamilton's product, after dividing by |q|."""
    w, x, y, z = (mpf(q[name]) for name in "wxyz")
    length = mp.sqrt(w * w + x * x + y * y + z * z)
    w, x, y, z = w / length, x / length, y / length, z / length
    return [
        [1 - 2 * (y * y + z * z), 2 * (x * y - w * z), 2 * (x * z + w * y)],
        [2 * (x * y + w * z), 1 - 2 * (x * x + z * z), 2 * (y * z - w * x)],
        [2 * (x * z - w * y), 2 * (y * z + w * x), 1 - 2 * (x * x + y * y)],
    ]


def _nearest_rotation(matrix):
    """The polar factor: X ← (X + X⁻ᵀ)/2 doubles its digits each time, from 1e-6 to 1e-1500 in 9."""
    x = [[mpf(value) for value in row] for row in matrix]
    for _ in range(9):
        other = transpose(inverse3(x))
        x = [[(a + b) / 2 for a, b in zip(*rows)] for rows in zip(x, other)]
    return x


def _euler(euler, units):
    """About moving axes R = R₁R₂R₃; about fixed axes R = R₃R₂R₁."""
    turns = [
        about([axis == name for name in "xyz"], units.number("angle", angle))
        for axis, angle in zip(euler["axes"], euler["angles"])
    ]
    return product(*(turns if euler["about"] == "moving" else turns[::-1]))


def quaternion_of(r):
    """The unit quaternion (w, x, y, z) with w ≥ 0 of a rotation matrix, by its largest component."""
    trace = r[0][0] + r[1][1] + r[2][2]
    squares = [(1 + trace) / 4] + [(1 - trace + 2 * r[i][i]) / 4 for i in range(3)]
    best = max(range(4), key=lambda i: squares[i])
    odd = [(r[2][1] - r[1][2]) / 4, (r[0][2] - r[2][0]) / 4, (r[1][0] - r[0][1]) / 4]
    even = {(i, j): (r[i][j] + r[j][i]) / 4 for i in range(3) for j in range(3)}
    if best == 0:
        products = [squares[0], *odd]
    else:
        k = best - 1
        products = [odd[k]] + [squares[best] if i == k else even[i, k] for i in range(3)]
    length = mp.sqrt(squares[best])
    q = [value / length for value in products]
    return q if q[0] >= 0 else scale(-1, q)
