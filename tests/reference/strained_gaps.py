"""Gaps of coherent (001) layers at 300 K from published constants; numpy only.

I. Vurgaftman, J. R. Meyer, L. R. Ram-Mohan, J. Appl. Phys. 89, 5815 (2001): lattice constants,
elastic constants, deformation potentials, split-off energies, bowings. Method: C. G. Van de Walle,
Phys. Rev. B 39, 1871 (1989), valence band by diagonalising the strain matrix instead of its closed
form.

    python3 tests/reference/strained_gaps.py
"""

import numpy as np

T = 300.0
#          a        C11     C12    E0     alpha      beta  delta  ac     av     b
DATA = {
    "GaAs": (5.65325, 122.1, 56.6, 1.519, 0.5405e-3, 204, 0.341, -7.17, -1.16, -2.0),
    "InAs": (6.0583, 83.29, 45.26, 0.417, 0.276e-3, 93, 0.390, -5.08, -1.00, -1.8),
    "InP": (5.8697, 101.1, 56.1, 1.4236, 0.363e-3, 162, 0.108, -6.0, -0.6, -2.0),
    "GaP": (5.4505, 140.5, 62.03, None, None, None, 0.08, -8.2, -1.7, -1.6),
}


def gap(name):
    if name == "GaP":
        return 2.886 + 0.1081 * (1 - 1 / np.tanh(164 / T))
    _, _, _, zero, alpha, beta, *_ = DATA[name]
    return zero - alpha * T * T / (T + beta)


def mix(first, second, x, bow_gap=0.0, bow_delta=0.0):
    """Parameters of first(x) second(1-x): a, C11, C12, gap, delta, ac, av, b."""
    p, q = DATA[first], DATA[second]
    linear = lambda i: x * p[i] + (1 - x) * q[i]
    bowed = x * gap(first) + (1 - x) * gap(second) - x * (1 - x) * bow_gap
    return linear(0), linear(1), linear(2), bowed, linear(6) - x * (1 - x) * bow_delta, linear(7), linear(8), linear(9)


def strained(layer, a_ground):
    a, c11, c12, eg, delta, ac, av, b = layer
    flat = a_ground / a - 1
    up = -2 * c12 / c11 * flat
    e = 2 * b * (up - flat)
    # Basis |3/2,3/2>, |3/2,1/2>, |1/2,1/2>; energies from the unstrained top.
    matrix = np.array([[-e / 2, 0, 0], [0, e / 2, e / np.sqrt(2)], [0, e / np.sqrt(2), -delta]])
    values, vectors = np.linalg.eigh(matrix)
    top = values[-1]
    return flat, up, eg, eg + (ac + av) * (2 * flat + up) - top, "light" if abs(vectors[0, -1]) < 0.5 else "heavy"


for name, layer, ground in [
    ("In0.2Ga0.8As on GaAs", mix("InAs", "GaAs", 0.2, 0.477, 0.15), DATA["GaAs"][0]),
    ("In0.1Ga0.9As on GaAs", mix("InAs", "GaAs", 0.1, 0.477, 0.15), DATA["GaAs"][0]),
    ("GaAs on Ge", mix("GaAs", "GaAs", 1.0), 5.6579),
    ("GaAs0.9P0.1 on GaAs", (0.9 * 5.65325 + 0.1 * 5.4505, 0.9 * 122.1 + 14.05, 0.9 * 56.6 + 6.203,
                             0.9 * gap("GaAs") + 0.1 * gap("GaP") - 0.09 * 0.19, 0.9 * 0.341 + 0.008,
                             -0.9 * 7.17 - 0.82, -0.9 * 1.16 - 0.17, -1.8 - 0.16), DATA["GaAs"][0]),
    ("In0.6Ga0.4As on InP", mix("InAs", "GaAs", 0.6, 0.477, 0.15), DATA["InP"][0]),
]:
    print(name, [round(v, 6) if not isinstance(v, str) else v for v in strained(layer, ground)])
print("numpy", np.__version__)
