"""Vectors and matrices of big floats, as plain lists."""

from mpmath import mp, mpf

# A double spans 2,098 bits from the least subnormal to the largest value, and a boost of
# rapidity 700 can cancel another 2,020 bits (γ² ≈ 1e608); both together still leave digits.
mp.prec = 4400

IDENTITY3 = [[mpf(i == j) for j in range(3)] for i in range(3)]


def dot(a, b):
    return sum((x * y for x, y in zip(a, b)), mpf(0))


def cross(a, b):
    return [
        a[1] * b[2] - a[2] * b[1],
        a[2] * b[0] - a[0] * b[2],
        a[0] * b[1] - a[1] * b[0],
    ]


def norm(a):
    return mp.sqrt(dot(a, a))


def scale(factor, a):
    return [factor * x for x in a]


def add(*vectors):
    return [sum(parts, mpf(0)) for parts in zip(*vectors)]


def transpose(m):
    return [list(column) for column in zip(*m)]


def apply(m, a):
    return [dot(row, a) for row in m]


def product(*matrices):
    """The matrix product, from left to right."""
    result = matrices[0]
    for factor in matrices[1:]:
        columns = transpose(factor)
        result = [[dot(row, column) for column in columns] for row in result]
    return result


def inverse3(m):
    """Inverse of a 3×3 matrix by cofactors: the columns of adj(M) are cross products of rows."""
    adjugate = transpose([cross(m[1], m[2]), cross(m[2], m[0]), cross(m[0], m[1])])
    determinant = dot(m[0], cross(m[1], m[2]))
    return [[x / determinant for x in row] for row in adjugate]
