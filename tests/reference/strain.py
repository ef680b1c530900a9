"""Strain balance, bow and cracks, worked out by plain arithmetic; Python 3, no packages.

Constants: Vurgaftman, Meyer, Ram-Mohan, J. Appl. Phys. 89, 5815 (2001); silicon C11 165.8,
C12 63.9 GPa (handbook).
"""

GAAS, INAS, GAP = (5.65325, 122.1, 56.6), (6.0583, 83.29, 45.26), (5.4505, 140.5, 62.03)


def modulus(c11, c12):
    return c11 + c12 - 2 * c12 * c12 / c11


def mix(x, one, two):
    return [x * a + (1 - x) * b for a, b in zip(one, two)]


def pull(layer, ground):
    return modulus(layer[1], layer[2]) * (ground / layer[0] - 1)


well, barrier, ground = mix(0.17, INAS, GAAS), mix(0.06, GAP, GAAS), GAAS[0]
print("barrier, nm", -8 * pull(well, ground) * barrier[0] / (pull(barrier, ground) * well[0]))

stress = modulus(*GAAS[1:]) * 0.00256
curvature = 6 * stress * 1e9 * 1e-6 / (modulus(165.8, 63.9) * 1e9 * 525e-6**2)
print("GaAs on Si: stress, GPa", stress, "curvature, 1/m", curvature, "bow, um", curvature * 0.01 / 8 * 1e6)

nu = GAAS[2] / (GAAS[1] + GAAS[2])
plane = modulus(*GAAS[1:]) * (1 - nu) / (1 - nu * nu)
print("plane-strain modulus, GPa", plane, "cracks from, um", 1.72 * plane * 1e9 / (1.976 * (stress * 1e9) ** 2) * 1e6)
