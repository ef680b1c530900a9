"""Single-pass currents under AM1.5G from published absorption, independent of the program under test.

    python3 tests/reference/absorbed_currents.py DATABASE

DATABASE: the `data` folder of the public-domain (CC0) refractive-index database, as unpacked from the Python
package `refractiveindex` 1.3.1. Needs numpy and PyYAML. Absorption as published: Si M. A. Green, Sol. Energy
Mater. Sol. Cells 92, 1305 (2008); GaAs Aspnes 1983 to 1.50 eV and the edge form of Miller et al. 2012 below;
k linear in wavelength, 1 - exp(-alpha d), photon flux of ASTM G173-03 linear in wavelength, 0.05 nm grid.
"""

import pathlib
import sys

import numpy as np
import yaml

ROOT = pathlib.Path(__file__).parents[2] / "src"
DATABASE = pathlib.Path(sys.argv[1])
H, C, Q = 6.62607015e-34, 299792458.0, 1.602176634e-19

sun = np.genfromtxt(ROOT / "light/spectra/g173.csv", delimiter=",", skip_header=2)
nm = np.arange(280, 1450, 0.05)
flux = np.interp(nm, sun[:, 0], sun[:, 2] * sun[:, 0]) / (H * C) * Q / 10 * 1e-9  # mA/cm2/nm


def table(path):
    blocks = yaml.safe_load((DATABASE / path).read_text())["DATA"]
    data = next(block["data"] for block in blocks if block["type"].startswith("tabulated"))
    return np.array([[float(cell) for cell in line.split()] for line in data.splitlines() if line.strip()])


def current(alpha_per_cm, metres, keep=nm > 0):
    return np.trapezoid(np.where(keep, flux * (1 - np.exp(-alpha_per_cm * 100 * metres)), 0), nm)


si = table("main/Si/nk/Green-2008.yml")
alpha = 4 * np.pi * np.interp(nm, si[:, 0] * 1e3, si[:, 2]) / (nm * 1e-7)
print("Si 200 um:", current(alpha, 200e-6))
print("Si 160 um:", current(alpha, 160e-6))
gaas = table("main/GaAs/nk/Aspnes.yml")
energy = H * C / Q / nm * 1e9
measured = 4 * np.pi * np.interp(nm, gaas[:, 0] * 1e3, gaas[:, 2]) / (nm * 1e-7)
form = 8000 * np.where(energy > 1.4255, 1 + (energy - 1.4255) / 0.140, np.exp((energy - 1.4255) / 0.0067))
alpha = np.where(energy > 1.50, measured, form)
print("GaAs 3 um:", current(alpha, 3e-6), "beyond 890 nm:", current(alpha, 3e-6, nm > 890))
print("numpy", np.__version__)
