"""Coefficients of the elementary functions in src/optics/wave/lanes.rs.

Remez's exchange on what lies beyond the leading terms, in 60 digits, rounded to doubles; prints
the coefficients and the largest error before rounding.

    pip install mpmath==1.3.0
    python tests/reference/elementary.py
"""

from mpmath import cos, exp, linspace, log, lu_solve, matrix, mp, mpf, nstr, pi, sin

mp.dps = 60


def minimax(target, powers, weight, low, high):
    """Coefficients of `powers` with the least largest |weight (sum - target)|, and that maximum."""
    count = len(powers)
    points = [low + (high - low) * (1 - cos(pi * i / count)) / 2 for i in range(count + 1)]
    for _ in range(12):
        a, b = matrix(count + 1, count + 1), matrix(count + 1, 1)
        for i, x in enumerate(points):
            for j, power in enumerate(powers):
                a[i, j] = x**power
            a[i, count] = (-1) ** i / weight(x)
            b[i] = target(x)
        solved = lu_solve(a, b)
        c = [solved[i] for i in range(count)]
        grid = linspace(low, high, 800)
        off = [weight(x) * (sum(k * x**power for k, power in zip(c, powers)) - target(x)) for x in grid]
        peaks, start = [], 0
        for i in range(1, len(grid) + 1):
            if i == len(grid) or off[i] * off[start] < 0:
                peaks.append(grid[max(range(start, i), key=lambda k: abs(off[k]))])
                start = i
        if len(peaks) != count + 1:
            break
        points = peaks
    return c, max(abs(value) for value in off)


def beyond_linear(x):
    return (exp(x) - 1 - x) / x**2 if abs(x) > mpf(10) ** -10 else mpf(1) / 2 + x / 6


quarter, half = pi / 4 * mpf("1.0001"), log(2) / 2 * mpf("1.0001")
small = mpf("0.02")
for name, found in {
    "SINE": minimax(lambda x: (sin(x) - x) / x**3, range(0, 12, 2), lambda x: x**3, mpf("0.01"), quarter),
    "COSINE": minimax(
        lambda x: (cos(x) - 1 + x**2 / 2) / x**4, range(0, 10, 2), lambda x: x**4, mpf("0.01"), quarter
    ),
    "EXPONENTIAL": minimax(beyond_linear, range(9), lambda x: max(abs(x), small) ** 2, -half, half),
}.items():
    print(name, nstr(found[1], 3), [float(value) for value in found[0]])
