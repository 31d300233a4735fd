"""The polynomial behind the arctangent of crates/core/src/lanes/arctangent.rs.

    python arctangent.py [COEFFICIENTS]

On |t| <= tan(pi/8), atan t = t + t z P(z) with z = t^2. P is the polynomial whose largest error, counted relative to the
arctangent, is smallest: exchange of the extremes (Remez 1934), worked out with 60 digits (mpmath 1.4.1). Prints the
coefficients of P, lowest power first, rounded to doubles, and the largest relative error before and after rounding.
"""
import sys

from mpmath import atan, cos, findroot, lu_solve, matrix, mp, mpf, pi, sqrt, tan

mp.dps = 60
COUNT = int(sys.argv[1]) if len(sys.argv) > 1 else 11
TOP = tan(pi / 8) ** 2


def wanted(z):
    t = sqrt(z)
    return (atan(t) / t - 1) / z if z > mpf(10) ** -30 else mpf(-1) / 3 + z / 5


def weight(z):
    """Turns an error of P into a relative error of the arctangent."""
    return z / (1 + z * wanted(z))


def polynomial(coefficients, z):
    value = mpf(0)
    for c in reversed(coefficients):
        value = value * z + c
    return value


def error(coefficients, z):
    return (polynomial(coefficients, z) - wanted(z)) * weight(z)


def remez():
    """The weight vanishes at 0, so every extreme lies above it."""
    points = [TOP * (1 - cos(pi * (i + mpf(1) / 2) / (COUNT + 1))) / 2 for i in range(COUNT + 1)]
    coefficients = []
    for _ in range(12):
        rows, right = matrix(COUNT + 1, COUNT + 1), matrix(COUNT + 1, 1)
        for i, z in enumerate(points):
            for k in range(COUNT):
                rows[i, k] = z ** k
            rows[i, COUNT] = (-1) ** i / weight(z)
            right[i] = wanted(z)
        solution = lu_solve(rows, right)
        coefficients = list(solution[:COUNT])
        roots = [findroot(lambda z: error(coefficients, z), (a, b), solver='anderson', tol=mpf(10) ** -60, verify=False)
                 for a, b in zip(points, points[1:])]
        ends = [mpf(0)] + roots + [TOP]
        points = [highest(coefficients, a, b) for a, b in zip(ends, ends[1:])]
    return coefficients, points


def highest(coefficients, low, high):
    """The place of the largest error between two roots (golden section)."""
    shrink = (sqrt(mpf(5)) - 1) / 2
    a, b = low, high
    while b - a > mpf(10) ** -25:
        left, right = b - shrink * (b - a), a + shrink * (b - a)
        if abs(error(coefficients, left)) < abs(error(coefficients, right)):
            a = left
        else:
            b = right
    return (a + b) / 2


coefficients, points = remez()
rounded = [float(c) for c in coefficients]
grid = [TOP * i / 4000 for i in range(1, 4001)]
for c in rounded:
    print(repr(c))
print('relative error', mp.nstr(max(abs(error(coefficients, z)) for z in points), 3),
      'with rounded coefficients', mp.nstr(max(abs(error([mpf(c) for c in rounded], z)) for z in grid), 3))
