"""GaInP over GaAs by Beer-Lambert, independent of the program under test.

numpy only: the library's own published tables, absorption 1 - exp(-alpha d) on a 0.05 nm grid,
AM1.5G photon flux interpolated linearly, no shift of either edge (the tables' own gaps). Prints the
currents of a 600 nm top cell and the thickness that matches a 3.5 um bottom cell.

    python3 tests/reference/beer_lambert.py
"""

import pathlib

import numpy as np

ROOT = pathlib.Path(__file__).parents[2] / "src"
H, C, Q = 6.62607015e-34, 299792458.0, 1.602176634e-19


def table(name):
    rows = []
    for line in (ROOT / "materials/library/tables" / name).read_text().splitlines():
        try:
            rows.append([float(cell) for cell in line.split(",")[:3]])
        except ValueError:
            continue
    return np.array(rows)


def absorption(name, gap, wavelength):
    """1/m; k linear in wavelength above the gap, ln k linear in photon energy below it."""
    rows = table(name)
    nm = wavelength * 1e9
    k = np.interp(nm, rows[:, 0], rows[:, 2])
    below = rows[rows[:, 2] > 0]
    tail = np.exp(np.interp(-1 / nm, -1 / below[:, 0], np.log(below[:, 2])))
    ends = nm > below[-1, 0]
    return 4 * np.pi / wavelength * np.where(H * C / Q / wavelength > gap, k, np.where(ends, 0, tail))


sun = np.genfromtxt(ROOT / "light/spectra/g173.csv", delimiter=",", skip_header=2)
x = np.arange(280, 1000, 0.05) * 1e-9
flux = np.interp(x, sun[:, 0] * 1e-9, sun[:, 2] * 1e9 * sun[:, 0] * 1e-9 / (H * C) * Q / 10)
top, bottom = absorption("GaInP.csv", 1.88, x), absorption("GaAs.csv", 1.4255, x)


def currents(thickness):
    left = np.exp(-top * thickness)
    return (np.trapezoid(flux * (1 - left), x), np.trapezoid(flux * left * (1 - np.exp(-bottom * 3.5e-6)), x))


print("600 nm:", currents(600e-9), "mA/cm2")
low, high = 1e-7, 5e-6
for _ in range(60):
    middle = 0.5 * (low + high)
    a, b = currents(middle)
    low, high = (middle, high) if a < b else (low, middle)
print("matched at", low * 1e9, "nm; numpy", np.__version__)
print("3 um GaAs alone:", np.trapezoid(flux * (1 - np.exp(-bottom * 3e-6)), x))
