"""Limits of one to three junctions, independent of the program under test.

numpy and scipy only: Bose-Einstein emission by quadrature in the photon energy, photon flux linear
between the points of the reference table, maximum power by bounded minimisation in the current.
Prints the values that stand in tests/integration/physics*.rs. Written with numpy and scipy as the
last line prints them.

    python3 tests/reference/detailed_balance.py
"""

import pathlib

import numpy as np
import scipy
from scipy.constants import c, e as q, h, k, sigma
from scipy.integrate import quad
from scipy.optimize import brentq, minimize, minimize_scalar

SPECTRA = pathlib.Path(__file__).parents[2] / "src" / "light" / "spectra"
SUN = (6.957e8 / 1.495978707e11) ** 2


class Table:
    """AM1.5G: cumulated photon current in A/m2 up to a wavelength in m, cut interpolated."""

    def __init__(self, column):
        data = np.genfromtxt(SPECTRA / "g173.csv", delimiter=",", skip_header=2)
        self.x, power = data[:, 0] * 1e-9, data[:, column] * 1e9
        self.flux = power * self.x / (h * c) * q
        steps = 0.5 * np.diff(self.x) * (self.flux[1:] + self.flux[:-1])
        self.sum = np.concatenate([[0.0], np.cumsum(steps)])
        self.total = np.trapezoid(power, self.x)

    def current(self, gap):
        """Photons above `gap` in eV, A/m2."""
        edge = min(h * c / (gap * q), self.x[-1])
        i = np.searchsorted(self.x, edge, side="right") - 1
        i = min(i, len(self.x) - 2)
        d = edge - self.x[i]
        slope = (self.flux[i + 1] - self.flux[i]) / (self.x[i + 1] - self.x[i])
        return self.sum[i] + d * (self.flux[i] + 0.5 * slope * d)


class BlackBody:
    """Sun of 6000 K that fills the share `dilution` of the hemisphere."""

    def __init__(self, dilution, temperature=6000.0):
        self.kt = k * temperature / q
        self.dilution = dilution
        self.total = sigma * temperature**4 * dilution

    def current(self, gap):
        return self.dilution * emission(gap, np.inf, 0.0, self.kt)


def emission(low, high, voltage, kt):
    """q 2 pi/(h3 c2) int E2/(exp((E - qV)/kT) - 1) dE, A/m2, one hemisphere, index 1."""
    prefactor = 2 * np.pi * q * (q * kt) ** 3 / (h**3 * c**2)
    a, b, u = low / kt, min(high / kt, low / kt + 60), voltage / kt
    value, _ = quad(lambda x: x * x / np.expm1(x - u), a, b, epsabs=0, epsrel=1e-11, limit=400,
                    points=[p for p in (a + 1, a + 3, a + 10) if p < b] or None)
    return prefactor * value


def voltage(target, low, high, kt):
    """Voltage at which the band low..high emits `target` A/m2 more than in the dark."""
    dark = emission(low, high, 0.0, kt)
    return brentq(lambda v: np.log((emission(low, high, v, kt) - dark) / target), 1e-3, low * (1 - 1e-9), xtol=1e-13)


def figures(light, gaps, temperature, concentration=1.0, faces=1.0):
    """Series string of opaque junctions, sunward first: currents, J_sc, V_oc, FF, efficiency."""
    kt = k * temperature / q
    bands = list(zip(gaps, [np.inf, *gaps[:-1]]))
    above = [0.0] + [light.current(g) for g in gaps]
    photo = [concentration * (above[i + 1] - above[i]) for i in range(len(gaps))]
    least = min(photo)

    def string(current):
        return sum(voltage((p - current) / faces, g, up, kt) for p, (g, up) in zip(photo, bands))

    best = minimize_scalar(lambda s: -least * (1 - s) * string(least * (1 - s)), bounds=(1e-4, 0.4),
                           method="bounded", options={"xatol": 1e-9})
    voc = string(0.0)
    power = -best.fun
    return photo, least, voc, power / (voc * least), power / (light.total * concentration)


def separate(light, gaps, temperature):
    kt = k * temperature / q
    above = [0.0] + [light.current(g) for g in gaps]
    power = 0.0
    for i, (g, up) in enumerate(zip(gaps, [np.inf, *gaps[:-1]])):
        p = above[i + 1] - above[i]
        best = minimize_scalar(lambda s: -p * (1 - s) * voltage(p * s, g, up, kt), bounds=(1e-4, 0.4), method="bounded")
        power -= best.fun
    return power / light.total


def best_gaps(efficiency, start):
    result = minimize(lambda gaps: -efficiency(list(gaps)), start, method="Nelder-Mead",
                      options={"xatol": 1e-5, "fatol": 1e-8})
    return [round(float(gap), 4) for gap in result.x], -result.fun


if __name__ == "__main__":
    am15g = Table(2)
    for gap in (1.12, 1.34, 1.42):
        _, j, v, ff, eff = figures(am15g, [gap], 298.15)
        print(f"AM1.5G {gap}: {j/10:.4f} mA/cm2 {v:.5f} V FF {ff:.5f} eff {eff:.5f}")
    print("1.34 eV, front and rear:", figures(am15g, [1.34], 298.15, faces=2.0)[4])
    for label, light, factor in (("one sun", BlackBody(SUN), 1.0), ("full", BlackBody(SUN), 1 / SUN)):
        for start in ([1.3], [1.7, 0.97], [2.0, 1.4, 0.95]):
            run = lambda gaps: figures(light, gaps, 300.0, factor)[4]
            print("6000 K", label, *best_gaps(run, start))
    for start in ([1.77, 0.98], [2.1, 1.4, 0.8]):
        print("6000 K separate", *best_gaps(lambda gaps: separate(BlackBody(SUN), gaps, 300.0), start))
    for start in ([1.6, 0.94], [1.9, 1.37, 0.933]):
        print("AM1.5G 300 K", *best_gaps(lambda gaps: figures(am15g, gaps, 300.0)[4], start))
    for gaps in ([1.85, 1.42], [1.95, 1.424], [1.9, 1.367, 0.933]):
        photo, j, v, ff, eff = figures(am15g, gaps, 298.15)
        print("AM1.5G 298.15 K", gaps, [round(p / 10, 4) for p in photo], round(v, 5), round(ff, 5), round(eff, 5))
    print("numpy", np.__version__, "scipy", scipy.__version__)
