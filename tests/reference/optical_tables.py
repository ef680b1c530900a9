"""Makes the compact n,k tables of src/materials/library/tables from published ones.

    python3 optical_tables.py DATA DATABASE OUT

DATA      folder with the thinned tables `optical/*.csv` (nm,n,k) and the joins `joined_*.csv`
DATABASE  the `data` folder of the public-domain (CC0) refractive-index database, as unpacked from
          the Python package `refractiveindex` 1.3.1
OUT       folder of the tables

Every join is stated in the `cite` of the material that uses the table. Needs PyYAML (6.0) only.
"""

import csv
import math
import pathlib
import sys

import yaml

DATA, DATABASE, OUT = (pathlib.Path(path) for path in sys.argv[1:4])
HC = 1239.841984  # eV nm
PER_K = 4 * math.pi * 1e7  # alpha in 1/cm is this times k over nm


def write(name, rows):
    rows = sorted(rows)
    lines = ["nm,n,k"]
    for nm, n, k in rows:
        lines.append(f"{nm:.6g},{n:.5g},{0 if k < 1e-12 else float(f'{k:.4g}'):g}")
    (OUT / f"{name}.csv").write_text("\n".join(lines) + "\n")


def thinned(name):
    """Rows nm, n, k of a table of DATA."""
    with open(DATA / "optical" / f"{name}.csv") as file:
        lines = [line for line in file if not line.startswith("#")]
    return [tuple(float(cell) for cell in row[:3]) for row in list(csv.reader(lines))[1:]]


def tabulated(path):
    """Rows in nm of the first table of a database file."""
    data = yaml.safe_load((DATABASE / path).read_text())["DATA"]
    block = next(entry for entry in data if entry["type"].startswith("tabulated"))
    rows = [[float(cell) for cell in line.split()] for line in block["data"].splitlines() if line.strip()]
    return [(row[0] * 1e3, *row[1:]) for row in rows]


def interpolate(rows, nm, column):
    for left, right in zip(rows, rows[1:]):
        if left[0] <= nm <= right[0]:
            share = (nm - left[0]) / (right[0] - left[0])
            return left[column] + share * (right[column] - left[column])
    raise ValueError(nm)


def alpha(nm, k):
    return PER_K * k / nm


def k_of(nm, per_cm):
    return per_cm * nm / PER_K


# Gaps at 300 K from Vurgaftman, Meyer, Ram-Mohan, J. Appl. Phys. 89, 5815 (2001).
def varshni(zero, a, b, t=300.0):
    return zero - a * t * t / (t + b)


GAAS_E0, ALAS_E0 = varshni(1.519, 5.405e-4, 204), varshni(3.099, 8.85e-4, 530)
GAAS_X, ALAS_X = varshni(1.981, 4.6e-4, 204), varshni(2.24, 7.0e-4, 530)


def algaas(x):
    mixed = x * (1 - x)
    direct = x * ALAS_E0 + (1 - x) * GAAS_E0 - mixed * (-0.127 + 1.310 * x)
    return direct, x * ALAS_X + (1 - x) * GAAS_X - 0.055 * mixed


def adachi(energy, e0, split_off, a, b):
    """n below the gap, Adachi, J. Appl. Phys. 61, 4869 (1987)."""

    def f(chi):
        return (2 - math.sqrt(1 + chi) - math.sqrt(1 - chi)) / chi**2

    upper = e0 + split_off
    return math.sqrt(a * (f(energy / e0) + 0.5 * (e0 / upper) ** 1.5 * f(energy / upper)) + b)


def algaas_table(percent):
    """Aspnes et al. 1986 above E0 + 0.1 eV; the edge form below, met there; n below 1.5 eV from
    Adachi's formula scaled to meet the table."""
    x = percent / 100
    measured = thinned(f"AlGaAs_{percent}")
    e0, ex = algaas(x)
    rows = [row for row in measured if HC / row[0] > e0 + 0.10]
    first = rows[-1]
    a0, at_first, over = 8e3 * (1 + x), alpha(first[0], first[2]), HC / first[0] - e0
    start = min(a0, at_first)
    indirect = (lambda e: 1.4e4 * max(e - ex, 0) ** 2) if ex < e0 else (lambda e: 0.0)
    for step in (0.08, 0.05, 0.02, 0.01, 0.0):
        if step < over:
            nm = HC / (e0 + step)
            per_cm = start + (at_first - start) * step / over
            rows.append((nm, interpolate(measured, nm, 1), k_of(nm, per_cm)))
    direct = max(start - indirect(e0), 0.0)
    grid = [e0 - d for d in (0.01, 0.02, 0.03, 0.05, 0.08, 0.12)]
    grid += [ex + d for d in (0.0, 0.03, 0.06, 0.1, 0.15, 0.2, 0.3, 0.4) if ex + d < e0 - 0.12]
    grid += [HC / row[0] for row in measured if HC / row[0] < e0 - 0.12]
    for energy in sorted(set(grid)):
        nm = HC / energy
        if nm <= measured[-1][0]:
            per_cm = direct * math.exp((energy - e0) / 0.009) + indirect(energy)
            rows.append((nm, interpolate(measured, nm, 1), k_of(nm, per_cm) if per_cm >= 1e-3 else 0.0))
    a, b = 6.30 + 19.0 * x, 9.40 - 10.2 * x
    split = 0.341 - 0.061 * x
    end = measured[-1]
    scale = end[1] / adachi(HC / end[0], e0, split, a, b)
    for nm in (870, 920, 1000, 1100, 1250, 1450, 1700, 2000):
        rows.append((nm, scale * adachi(HC / nm, e0, split, a, b), 0.0))
    unique = {round(row[0], 3): row for row in rows}
    write(f"AlGaAs_{round(percent * 10):03d}", unique.values())


def gap_table():
    """GaP: Aspnes & Studna 1983, k = 0 below 2.20 eV; above 650 nm Bond 1965 plus 0.011."""
    rows = [(nm, n, k if HC / nm >= 2.20 else 0.0) for nm, n, k in thinned("GaP") if nm <= 650]
    bond = tabulated("main/GaP/nk/Bond.yml")
    rows += [(nm, n + 0.011, 0.0) for nm, n in bond if 650 < nm <= 2400]
    write("GaP", rows)


def alas_table():
    """AlAs: Rakic & Majewski 1996 above 2.9 eV; a square law from 2.164 eV on below, met there; n
    from Fern & Onton 1971 above 600 nm, faded in from 540 nm."""
    model = [row for row in thinned("AlAs") if row[0] >= 270]
    cut = 2.9
    met = alpha(HC / cut, interpolate(model, HC / cut, 2))
    law = met / (cut - 2.164) ** 2
    print(f"AlAs: C = {law:.3g} /cm/eV2, {met:.3g} /cm at {cut} eV")

    def fern(nm):
        um2 = (nm / 1e3) ** 2
        return math.sqrt(1 + 1.0792 + 6.0840 * um2 / (um2 - 0.2822**2) + 1.900 * um2 / (um2 - 27.62**2))

    rows = []
    for nm in sorted({row[0] for row in model if row[0] <= 2000} | {HC / 2.9, HC / 2.164, 480, 520, 600, 2000}):
        energy = HC / nm
        n = interpolate(model, nm, 1) if nm <= 600 else 0.0
        if nm > 560:
            share = min(max((nm - 560) / 40, 0), 1)
            n = (1 - share) * n + share * fern(nm)
        k = interpolate(model, nm, 2) if energy >= cut else k_of(nm, law * max(energy - 2.164, 0) ** 2)
        rows.append((nm, n, k))
    write("AlAs", rows)


def inas_table():
    """InAs: Aspnes & Studna 1983 to 826.6 nm, then Adachi 1989 with k times 1.42 fading to 1 at
    0.9 eV; Urbach tail of 10 meV below the gap of 0.354 eV."""
    model = tabulated("main/InAs/nk/Adachi.yml")
    rows = thinned("InAs")
    grid = [860, 900, 950, 1000, 1060, 1120, 1200, 1280, 1380, 1500, 1650, 1850, 2100, 2400, 2700, 3000, 3200]
    grid += [3300, 3400, 3450]
    edge = varshni(0.417, 2.76e-4, 93)
    for nm in grid:
        energy = HC / nm
        fade = 1 + 0.42 * min(max((energy - 0.9) / (1.5 - 0.9), 0), 1)
        n = interpolate(model, nm, 1)
        rows.append((nm, n, interpolate(model, nm, 2) * fade))
    at_edge = interpolate(model, HC / edge, 2)
    for below in (0.0, 0.01, 0.02, 0.04, 0.08, 0.15):
        nm = HC / (edge - below)
        k = at_edge * math.exp(-below / 0.010)
        rows.append((nm, interpolate(model, nm, 1), k if alpha(nm, k) >= 1e-3 else 0.0))
    write("InAs", rows)


def gainp_table():
    """GaInP 0.51: Ferrini et al. 2002 to 620 nm; Schubert et al. 1995 from there, its k times 0.74 to
    meet, Urbach energy 10 meV below 1.857 eV; n above 950 nm from Ferrini's formula, as joined."""
    joined = [row for row in thinned("joined_GaInP") if row[0] > 620]
    write("GaInP", thinned("GaInP_Ferrini") + [(nm, n, 0.74 * k) for nm, n, k in joined])


def gasb_table():
    """GaSb: Ferrini et al. 1998 above 0.75 eV; edge 0.727 eV, 3.5e3 /cm, 10 meV below."""
    measured = thinned("GaSb")
    rows = [row for row in measured if HC / row[0] >= 0.75]
    join = rows[-1]
    at_join = alpha(join[0], join[2])
    for energy in (0.74, 0.727, 0.717, 0.707, 0.69, 0.66, 0.62, 0.58, 0.54, 0.50):
        nm = HC / energy
        if energy >= 0.727:
            share = (energy - 0.727) / (HC / join[0] - 0.727)
            per_cm = 3.5e3 + share * (at_join - 3.5e3)
        else:
            per_cm = 3.5e3 * math.exp((energy - 0.727) / 0.010)
        n = interpolate(measured, min(nm, measured[-1][0]), 1)
        rows.append((nm, n, k_of(nm, per_cm) if per_cm >= 1e-3 else 0.0))
    write("GaSb", rows)


def insb_table():
    """InSb: Aspnes & Studna 1983 to 826.6 nm, then Adachi 1989 with k times 1.44 fading to 1 at 0.9 eV;
    Urbach tail of 10 meV below the gap of 0.174 eV."""
    model = tabulated("main/InSb/nk/Adachi.yml")
    rows = thinned("InSb")
    edge = varshni(0.235, 3.2e-4, 170)
    fade_from, fade_to = HC / rows[-1][0], 0.9
    up = rows[-1][2] / interpolate(model, rows[-1][0], 2)
    print(f"InSb: k of the model times {up:.3f}")
    for nm in (880, 950, 1030, 1130, 1240, 1380, 1550, 1780, 2070, 2480, 3000, 3500, 4000, 4800, 5600, 6400, 6900):
        fade = 1 + (up - 1) * min(max((HC / nm - fade_to) / (fade_from - fade_to), 0), 1)
        rows.append((nm, interpolate(model, nm, 1), interpolate(model, nm, 2) * fade))
    at_edge = interpolate(model, HC / edge, 2)
    for below in (0.0, 0.01, 0.02, 0.03):
        nm = HC / (edge - below)
        rows.append((nm, interpolate(model, nm, 1), at_edge * math.exp(-below / 0.010)))
    write("InSb", rows)


def alsb_table():
    """AlSb: Zollner et al. 1989, k = 0 below the X gap of 1.616 eV; n beyond 885 nm from Adachi's formula
    of 1987 scaled to meet."""
    rows = [(nm, n, k if HC / nm >= 1.616 else 0.0) for nm, n, k in thinned("AlSb")]
    e0 = varshni(2.386, 4.2e-4, 140)
    end = rows[-1]
    scale = end[1] / adachi(HC / end[0], e0, 0.676, 59.68, -9.53)
    print(f"AlSb: n of the formula times {scale:.4f}")
    rows.append((HC / 1.616, interpolate(thinned("AlSb"), HC / 1.616, 1), 0.0))
    for nm in (950, 1050, 1200, 1400, 1700, 2100):
        rows.append((nm, scale * adachi(HC / nm, e0, 0.676, 59.68, -9.53), 0.0))
    write("AlSb", rows)


def algasb_table(percent):
    """AlGaSb: Ferrini et al. 1998 from 0.03 eV above the direct gap on (nearer their points lie too far
    apart); the edge form of GaSb below, met there; the indirect part is the family's own."""
    x = percent / 100
    path = f"other/semiconductor alloys/AlSb-GaSb/nk/Ferrini-{percent}.yml"
    measured = [row for row in tabulated(path) if row[0] >= 275]
    gasb, alsb = varshni(0.812, 4.17e-4, 140), varshni(2.386, 4.2e-4, 140)
    e0 = x * alsb + (1 - x) * gasb - x * (1 - x) * (-0.044 + 1.22 * x)
    rows = [row for row in measured if HC / row[0] > e0 + 0.03]
    join = rows[-1]
    at_join, over = alpha(join[0], join[2]), HC / join[0] - e0
    start = min(3.5e3, at_join)
    print(f"AlGaSb {percent}: E0 {e0:.3f} eV, {at_join:.3g} /cm at {HC / join[0]:.2f} eV")
    for step in (0.05, 0.02, 0.01, 0.0):
        if step < over:
            nm = HC / (e0 + step)
            rows.append((nm, interpolate(measured, nm, 1), k_of(nm, start + (at_join - start) * step / over)))
    for below in (0.01, 0.02, 0.035, 0.06, 0.1, 0.14, 0.17):
        nm = HC / (e0 - below)
        per_cm = start * math.exp(-below / 0.010)
        rows.append((nm, interpolate(measured, nm, 1), k_of(nm, per_cm) if per_cm >= 1e-3 else 0.0))
    rows += [(nm, n, 0.0) for nm, n, k in measured if HC / nm < e0 - 0.18]
    write(f"AlGaSb_{percent:02d}", rows)


def sige_table(percent):
    """SiGe of `percent` silicon: Jellison et al. 1993 while k is above 0.1 (its accuracy is 0.003 to 0.02).
    Below, ln alpha and n between those of germanium and silicon, weighted by composition, at the energy
    that lies as far between the lowest gap and the point where k is 0.1; both bent to meet."""
    x = percent / 100
    measured = thinned(f"SiGe_{percent}")
    ge, si = table_of("Ge"), thinned("joined_Si")

    def where(rows):
        for left, right in zip(rows, rows[1:]):
            if left[2] >= 0.1 > right[2] and HC / left[0] < 3.2:
                share = (left[2] - 0.1) / (left[2] - right[2])
                return HC / (left[0] + share * (right[0] - left[0]))
        return HC / measured[-1][0]

    low, cut = sige_gap(x), where(measured)
    rows = [row for row in measured if HC / row[0] > cut + 0.01]
    ends = [(0.661, where(ge), ge, 1 - x), (1.1245, where(si), si, x)]
    n_cut, k_cut = (interpolate(measured, min(HC / cut, measured[-1][0]), column) for column in (1, 2))

    def model(share):
        """n and ln alpha at a share of the way from the gap to the cut; n alone below the gap."""
        n, log = 0.0, 0.0
        for gap, top, table, weight in ends:
            energy = gap + share * (top - gap) if share >= 0 else gap * (1 + share)
            nm = min(HC / energy, table[-1][0])
            n += weight * interpolate(table, nm, 1)
            log += weight * math.log(max(alpha(nm, interpolate(table, nm, 2)), 1e-3))
        return n, log

    n_top, log_top = model(1.0)
    steps = (1.0, 0.9, 0.8, 0.7, 0.6, 0.5, 0.4, 0.3, 0.2, 0.15, 0.1, 0.05, 0.02, 0.0)
    for share in steps:
        n, log = model(share)
        nm = HC / (low + share * (cut - low))
        # What is left of the step to the measurement fades towards the gap.
        per_cm = math.exp(log + share * (math.log(alpha(HC / cut, k_cut)) - log_top))
        rows.append((nm, n + share * (n_cut - n_top), k_of(nm, per_cm)))
    for below in (0.02, 0.05, 0.08, 0.12):
        at_gap = math.exp(model(0.0)[1])
        nm = HC / (low - below)
        per_cm = at_gap * math.exp(-below / 0.010)
        rows.append((nm, model(-below / low)[0], k_of(nm, per_cm) if per_cm >= 1e-3 else 0.0))
    rows.append((2400, model(-0.4)[0], 0.0))
    print(f"SiGe {percent}: gap {low:.3f}, cut {cut:.3f} eV, n off by {n_cut - n_top:+.3f}, "
          f"alpha {alpha(HC / cut, k_cut):.3g} against {math.exp(log_top):.3g} /cm")
    write(f"SiGe_{percent:02d}", rows)


def table_of(name):
    """A table already written to OUT."""
    with open(OUT / f"{name}.csv") as file:
        return [tuple(float(cell) for cell in row) for row in list(csv.reader(file))[1:]]


def sige_gap(silicon):
    """Lowest gap at 300 K: ends of the handbooks, X bowing 0.206 eV, L at 2.010 eV in silicon."""
    x = 1 - silicon
    return min(1.1245 * silicon + 0.85 * x - 0.206 * x * silicon, 2.010 * silicon + 0.661 * x)


def inganas_table():
    """InGaAsN of 1.0 eV: the table of GaAs with photon energy between 0 and E0 + 1.51 eV (E1) mapped so
    that E0 falls from 1.424 to 1.0 eV while E1 stays; k below the edge moved rigidly. A model."""
    parent = thinned("joined_GaAs")
    old, new, e1 = 1.4225, 1.0, 2.93
    rows = []
    for nm, n, k in parent:
        energy = HC / nm
        if energy >= e1:
            moved = energy
        elif energy >= old:
            moved = new + (energy - old) * (e1 - new) / (e1 - old)
        elif energy >= old - 0.15:
            moved = energy - old + new
        else:
            moved = energy * (new - 0.15) / (old - 0.15)
        rows.append((HC / moved, n, k))
    write("InGaAsN", rows)


def germanium_table():
    """Ge: Nunley et al. 2016; beyond the join every third point of the database to 2.48 um."""
    rows = thinned("joined_Ge")
    far = [row for row in tabulated("main/Ge/nk/Nunley.yml") if row[0] > rows[-1][0] + 5]
    rows += [(nm, n, k if alpha(nm, k) >= 1e-3 else 0.0) for nm, n, k in far]
    write("Ge", rows)


def zns_table():
    """ZnS: Querry 1987 below 395 nm, Amotchkina et al. 2020 above."""
    ultraviolet = [row for row in tabulated("main/ZnS/nk/Querry.yml") if 255 <= row[0] < 395]
    write("ZnS", ultraviolet + thinned("ZnS"))


for percent in (9.9, 19.8, 31.5, 41.9, 49.1, 59.0, 70.0, 80.4):
    algaas_table(percent)
gap_table()
alas_table()
inas_table()
gasb_table()
zns_table()
gainp_table()
insb_table()
alsb_table()
for percent in (10, 30, 50):
    algasb_table(percent)
germanium_table()
for percent in (11, 20, 28, 47, 65, 85, 98):
    sige_table(percent)
inganas_table()
for name in ("GaAs", "InP", "Si"):
    write(name, thinned(f"joined_{name}"))
for name, source in {
    "TiO2": "TiO2", "Al2O3": "Al2O3", "Ta2O5": "Ta2O5", "HfO2": "HfO2", "Nb2O5": "Nb2O5",
    "glass": "glass_lowiron", "EVA": "EVA", "Au": "Au", "Ag": "Ag", "Al": "Al", "Cu": "Cu",
    "Ti": "Ti", "Ni": "Ni", "Pd": "Pd", "Pt": "Pt",
}.items():
    write(name, thinned(source))
