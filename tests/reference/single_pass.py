"""Currents of one pass through a film under AM1.5G, without reflection, from the published tables
before they were thinned.

    python3 single_pass.py DATABASE G173

DATABASE  the `data` folder of the Python package `refractiveindex` 1.3.1
G173      src/light/spectra/g173.csv

numpy 2: trapezoids on a grid of 0.1 nm, photon flux linear between the points of the spectrum.
"""

import math
import pathlib
import sys

import numpy as np
import yaml

DATABASE, G173 = pathlib.Path(sys.argv[1]), pathlib.Path(sys.argv[2])
HC = 1239.841984  # eV nm
light = np.array(
    [[float(c) for c in line.split(",")[:4]] for line in G173.read_text().splitlines() if line[:1].isdigit()]
)
GRID = np.arange(280.0, 1900.0, 0.1)
# photons/s/m2/nm
FLUX = np.interp(GRID, light[:, 0], light[:, 2] * light[:, 0] * 1e-9 / (6.62607015e-34 * 299792458.0))


def table(path):
    data = yaml.safe_load((DATABASE / path).read_text())["DATA"]
    rows = next(e["data"] for e in data if e["type"].startswith("tabulated")).splitlines()
    return np.array([[float(c) for c in line.split()] for line in rows if line.strip()]) * [1e3, 1, 1]


def current(path, edge_ev, urbach_ev, floor, depth_nm, beyond_ev=0.0):
    rows = table(path)
    k = np.interp(GRID, rows[:, 0], rows[:, 2])
    at_edge = np.interp(HC / edge_ev, rows[:, 0], rows[:, 2]) - floor
    energy = HC / GRID
    # alpha falls by e each Urbach energy; k carries the wavelength as well.
    k = np.where(energy >= edge_ev, k, at_edge * np.exp((energy - edge_ev) / urbach_ev) * GRID * edge_ev / HC)
    absorbed = 1 - np.exp(-4 * math.pi * k / GRID * depth_nm)
    absorbed[energy < beyond_ev] = 0
    return 1.602176634e-19 * 0.1 * np.trapezoid(FLUX * absorbed, GRID)


def above(edge_ev):
    return 1.602176634e-19 * 0.1 * np.trapezoid(FLUX * (HC / GRID >= edge_ev), GRID)


mapbi3 = "other/perovskite/CH3NH3PbI3/nk/Phillips.yml"
print("MAPbI3, 500 nm:", current(mapbi3, 1.60, 0.015, 0.0127, 500), "of", above(1.60), "mA/cm2")
print("  below 1.56 eV:", current(mapbi3, 1.60, 0.015, 0.0127, 500) - current(mapbi3, 1.60, 0.015, 0.0127, 500, 1.56))
print("CdTe, 2 um:", current("main/CdTe/nk/Treharne.yml", 1.50, 0.015, 0.0, 2000), "of", above(1.50), "mA/cm2")
print("above 1.15 eV:", above(1.15))
