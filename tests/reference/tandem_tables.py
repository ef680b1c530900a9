"""Makes the n,k tables of perovskites, II-VI compounds, CIGS, contacts, and some coats and metals in
src/materials/library/tables.

    python3 tandem_tables.py DATABASE OUT

DATABASE  the `data` folder of the public-domain (CC0) refractive-index database, as unpacked from
          the Python package `refractiveindex` 1.3.1
OUT       folder of the tables

Measured rows are thinned so that linear interpolation between those kept is within TOLERANCE of
every row left out; what was reached is printed. Joins and models are stated in the `cite` of the
material that uses the table. Needs PyYAML 6.0, numpy 2 and scipy 1 at authoring time only.
"""

import math
import pathlib
import sys

import numpy as np
import yaml
from scipy.optimize import least_squares

DATABASE, OUT = (pathlib.Path(path) for path in sys.argv[1:3])
HC = 1239.841984  # eV nm
PER_CM = 4 * math.pi * 1e7  # alpha in 1/cm is this times k over nm
# n: absolute. k: of its own value, or absolute where it is small.
TOLERANCE = {"n": 4e-3, "k": 0.02, "small k": 2e-4}
FIRST, LAST = 279.0, 2000.0


def tabulated(path):
    """Rows (nm, n, k) of the first table of a database file; negative and denormal k are 0."""
    data = yaml.safe_load((DATABASE / path).read_text())["DATA"]
    block = next(entry for entry in data if entry["type"].startswith("tabulated"))
    rows = [[float(cell) for cell in line.split()] for line in block["data"].splitlines() if line.strip()]
    return [(row[0] * 1e3, row[1], row[2] if row[2] > 1e-9 else 0.0) for row in rows]


def within(rows, low=FIRST, high=LAST):
    """Rows from the one at or before `low` to the one at or after `high`."""
    inside = [at for at, row in enumerate(rows) if low <= row[0] <= high]
    return rows[max(inside[0] - 1, 0) : inside[-1] + 2]


def at(rows, nm, column):
    return float(np.interp(nm, [row[0] for row in rows], [row[column] for row in rows]))


def k_of(nm, per_cm):
    return per_cm * nm / PER_CM


def alpha(nm, k):
    return PER_CM * k / nm


def thin(rows, name, small=TOLERANCE["small k"]):
    """Keeps as few rows as the tolerance allows, each stretch as long as possible."""
    kept, start, worst = [rows[0]], 0, [0.0, 0.0]

    def errors(first, last):
        inner = np.array(rows[first + 1 : last])
        if not len(inner):
            return 0.0, 0.0
        (x0, n0, k0), (x1, n1, k1) = rows[first], rows[last]
        share = (inner[:, 0] - x0) / (x1 - x0)
        n = np.abs(n0 + share * (n1 - n0) - inner[:, 1])
        k = np.abs(k0 + share * (k1 - k0) - inner[:, 2])
        limit = np.maximum(TOLERANCE["k"] * inner[:, 2], small)
        return float(n.max() / TOLERANCE["n"]), float((k / limit).max())

    while start < len(rows) - 1:
        end = start + 1
        while end + 1 < len(rows) and max(errors(start, end + 1)) <= 1.0:
            end += 1
        worst = [max(a, b) for a, b in zip(worst, errors(start, end))]
        kept.append(rows[end])
        start = end
    print(
        f"{name}: {len(rows)} rows to {len(kept)}; n within {worst[0] * TOLERANCE['n']:.1e}, "
        f"k within {100 * worst[1] * TOLERANCE['k']:.1f} % or {worst[1] * small:.0e}"
    )
    return kept


def write(name, rows):
    lines = ["nm,n,k"]
    for nm, n, k in sorted(rows):
        k = 0 if k < 1e-12 else float(f"{k:.4g}")
        lines.append(f"{nm:.7g},{n:.5g},{k:g}")
    (OUT / f"{name}.csv").write_text("\n".join(lines) + "\n")


def tail(edge_ev, per_cm, urbach_ev, index, last=LAST):
    """Urbach tail below `edge_ev`, dense enough for linear interpolation of ln k in energy, down to
    alpha = 1e-3 /cm, then 0; n from `index(nm)`."""
    decades = math.log(per_cm / 1e-3)
    energies = [edge_ev - urbach_ev * step for step in np.linspace(0.0, decades, 9)]
    # Rounded up, so that the first one is not above the edge: between points above it k is linear.
    nms = [math.ceil(HC / e * 1e3) / 1e3 for e in energies]
    rows = [(nm, index(nm), k_of(nm, per_cm * math.exp((HC / nm - edge_ev) / urbach_ev))) for nm in nms]
    end = rows[-1][0]
    rows.append((end + 1, index(end + 1), 0.0))
    grid = [nm for nm in (820, 860, 900, 950, 1000, 1100, 1200, 1400, 1600, 1800, last) if nm > end + 5]
    # Where the tail ends early, n still bends.
    grid += [nm for nm in np.arange(520, 820, 20) if nm > end + 5]
    return rows + [(float(nm), index(nm), 0.0) for nm in sorted(grid)]


def sellmeier(constant, terms):
    return lambda nm: math.sqrt(
        constant + sum(b * (nm / 1e3) ** 2 / ((nm / 1e3) ** 2 - c) for b, c in terms)
    )


# ---- perovskites ----


def mapbi3():
    """Phillips et al. 2015; k kept from 1.62 eV up, at 1.60 eV less the floor of the fit, Urbach energy
    15 meV below (S. De Wolf et al. 2014); Leguy et al. 2015 below 300 nm, scaled to meet; n held
    above 1501 nm."""
    rows = tabulated("other/perovskite/CH3NH3PbI3/nk/Phillips.yml")
    uv = [row for row in tabulated("other/perovskite/CH3NH3PbI3/nk/Leguy.yml") if row[0] <= 300.0]
    first = rows[0]
    scale = [first[1] / at(tabulated("other/perovskite/CH3NH3PbI3/nk/Leguy.yml"), first[0], 1),
             first[2] / at(tabulated("other/perovskite/CH3NH3PbI3/nk/Leguy.yml"), first[0], 2)]
    uv = [(nm, n * scale[0], k * scale[1]) for nm, n, k in uv if nm < first[0]]
    floor = min(row[2] for row in rows if row[0] > 850)
    print(f"MAPbI3: Leguy times {scale[0]:.3f} in n, {scale[1]:.3f} in k; floor {floor:.4f}")
    index = lambda nm: at(rows, nm, 1)
    measured = [row for row in within(uv + rows) if HC / row[0] >= 1.62]
    edge = alpha(HC / 1.60, at(rows, HC / 1.60, 2) - floor)
    print(f"MAPbI3: {edge:.3g} /cm at 1.60 eV")
    write("MAPbI3", thin(measured, "MAPbI3") + tail(1.60, edge, 0.015, index))


def bromide(name, path, edge_ev, urbach_ev):
    """Single crystals with a clean edge: k kept from `edge_ev` up, a tail below."""
    rows = tabulated(path)
    index = lambda nm: at(rows, nm, 1)
    measured = [row for row in within(rows) if HC / row[0] > edge_ev]
    edge = alpha(HC / edge_ev, at(rows, HC / edge_ev, 2))
    print(f"{name}: {edge:.3g} /cm at {edge_ev} eV")
    write(name, thin(measured, name) + tail(edge_ev, edge, urbach_ev, index))


# ---- II-VI compounds and amorphous silicon ----


def two_six(name, path, edge_ev, urbach_ev, beyond):
    """k of the file from `edge_ev` up, a tail below; n of the file to its end, then a published law
    scaled to meet it, or held where there is none."""
    rows = tabulated(path)
    last = rows[-1]
    scale = last[1] / beyond(last[0]) if beyond else 0.0
    print(f"{name}: law of n times {scale:.4f} beyond {last[0]:.0f} nm" if beyond else f"{name}: n held")
    index = lambda nm: at(rows, nm, 1) if nm <= last[0] or not beyond else scale * beyond(nm)
    measured = [row for row in within(rows) if HC / row[0] > edge_ev]
    edge = alpha(HC / edge_ev, at(rows, HC / edge_ev, 2))
    print(f"{name}: {edge:.3g} /cm at {edge_ev} eV")
    write(name, thin(measured, name) + tail(edge_ev, edge, urbach_ev, index))


# ---- CIGS: a model, nothing measured ----


def cigs(name, gap_ev):
    """alpha = 8e3 (1 + (E - Eg)/0.09 eV) /cm above the gap, Urbach energy 20 meV below; n read off
    published plots from memory: 2.95 to 700 nm, 2.85 at 1000 nm, 2.75 at 1500 nm, for the mixed
    crystal of 1.15 eV, moved along with the gap."""
    known = [(280, 2.55), (400, 2.70), (500, 2.90), (600, 2.95), (700, 2.95), (1000, 2.85), (1500, 2.75), (2000, 2.71)]
    reference = 1.15

    def index(nm):
        energy = HC / nm - (gap_ev - reference)
        own = HC / energy if energy > 0.3 else 4000.0
        return float(np.interp(own, [row[0] for row in known], [row[1] for row in known]))

    per_cm = lambda e: 8e3 * (1 + (e - gap_ev) / 0.09)
    energies = [e for e in np.arange(4.45, gap_ev, -0.1)] + [gap_ev + d for d in (0.05, 0.02)]
    rows = [(HC / e, index(HC / e), k_of(HC / e, per_cm(e))) for e in energies]
    write(name, rows + tail(gap_ev, 8e3, 0.020, index))


# ---- contacts ----


def drude(energy, infinity, plasma, damping):
    eps = infinity - plasma**2 / (energy**2 + 1j * energy * damping)
    root = np.sqrt(eps)
    return root.real, root.imag


def conductor(name, path, until=4000.0):
    """Measured to the end of the file, then free carriers (Drude) fitted to its last 200 nm."""
    rows = tabulated(path)
    end = rows[-1][0]
    last = np.array([row for row in rows if row[0] >= end - 200])
    energy = HC / last[:, 0]

    def residual(p):
        n, k = drude(energy, *p)
        return np.concatenate([(n - last[:, 1]) / 0.01, (k - last[:, 2]) / 0.001])

    fit = least_squares(residual, [3.8, 1.5, 0.1], bounds=([1, 0.2, 0.005], [8, 4, 1]))
    n, k = drude(energy, *fit.x)
    print(
        f"{name}: eps_inf {fit.x[0]:.3f}, plasma {fit.x[1]:.3f} eV, damping {fit.x[2]:.4f} eV; last 200 nm "
        f"within {np.abs(n - last[:, 1]).max():.4f} in n, {np.abs(k - last[:, 2]).max():.5f} in k; ends {end:.0f} nm"
    )
    # The step that is left at the end of the table fades out over 150 nm.
    step = [rows[-1][1] - float(drude(HC / end, *fit.x)[0]), rows[-1][2] - float(drude(HC / end, *fit.x)[1])]
    beyond = []
    for nm in np.concatenate([np.arange(end + 10, 2400, 10.0), np.arange(2400, until + 1, 50.0)]):
        n, k = drude(HC / nm, *fit.x)
        fade = max(0.0, 1 - (nm - end) / 150)
        beyond.append((float(nm), float(n) + fade * step[0], float(k) + fade * step[1]))
    write(name, thin(within(rows, high=until) + beyond, name, small=5e-5))
    return rows, fit.x


def light_ito(rows, fitted, until=4000.0):
    """The measured film with its free carriers taken away and those of 2e20 /cm3 at 40 cm2/V/s put in
    their place: effective mass 0.35, plasma energy by N q2 / (eps0 m), damping by q / (m mobility)."""
    mass, density, mobility = 0.35, 2e20, 40.0
    plasma = math.sqrt(1.3789e-21 * density / mass)  # hbar sqrt(N q2 / (eps0 m)), eV
    damping = 1.15768 / (mass * mobility)  # hbar q / (m mobility), eV
    infinity, own_plasma, own_damping = fitted
    term = lambda e, p, g: -(p**2) / (e**2 + 1j * e * g)
    made = []
    for nm, n, k in within(rows):
        energy = HC / nm
        eps = (n + 1j * k) ** 2 - term(energy, own_plasma, own_damping) + term(energy, plasma, damping)
        root = np.sqrt(complex(eps.real, max(eps.imag, 0.0)))
        made.append((nm, root.real, root.imag))
    for nm in np.concatenate([np.arange(rows[-1][0] + 10, 2400, 10.0), np.arange(2400, until + 1, 50.0)]):
        root = np.sqrt(infinity + term(HC / nm, plasma, damping))
        made.append((float(nm), float(root.real), float(root.imag)))
    print(f"ITO_light: plasma {plasma:.3f} eV, damping {damping:.4f} eV")
    write("ITO_light", thin(made, "ITO_light", small=5e-5))


def zno():
    """Intrinsic stand-in: the doped film of Treharne et al. 2011 from 300 to 370 nm with k cut below
    3.20 eV; n of the crystal (Bond 1965) from 450 nm on, bridged between."""
    film = tabulated("other/doped crystals/Al-ZnO/nk/Treharne.yml")
    bond = lambda nm: math.sqrt(2.81418 + 0.87968 * (nm / 1e3) ** 2 / ((nm / 1e3) ** 2 - 0.3042**2) - 0.00711 * (nm / 1e3) ** 2)
    rows = []
    for nm, n, k in film:
        if nm <= 370:
            rows.append((nm, n, k if HC / nm >= 3.35 else 0.0))
    edge = alpha(HC / 3.35, at(film, HC / 3.35, 2))
    top, low = 370.0, 450.0
    join = at(film, top, 1)

    def index(nm):
        if nm <= top:
            return at(film, nm, 1)
        if nm < low:
            return join + (bond(low) - join) * (nm - top) / (low - top)
        return bond(nm)

    measured = [row for row in rows if HC / row[0] > 3.35]
    below = tail(3.35, edge, 0.030, index)
    grid = [(float(nm), index(nm), 0.0) for nm in (450, 480, 500)]
    print(f"ZnO: {edge:.3g} /cm at 3.35 eV, n {join:.3f} at 370 nm, {bond(450):.3f} at 450 nm")
    write("ZnO", thin(measured, "ZnO") + below + grid)


def measured(name, path):
    """As measured; where it ends short of the spectrum, the reader holds the last value and says so."""
    write(name, thin(within(tabulated(path)), name))


def pedot():
    """n and k of Chen et al. 2015 were read off separately: k on the grid of n."""
    data = yaml.safe_load((DATABASE / "other/mixed organic/PEDOT-PSS/nk/Chen.yml").read_text())["DATA"]
    parts = [[[float(c) for c in line.split()] for line in e["data"].splitlines() if line.strip()] for e in data]
    n, k = (np.array(part) for part in parts[:2])
    grid = np.unique(np.concatenate([n[:, 0], k[:, 0]]))
    grid = grid[(grid >= n[0, 0]) & (grid <= n[-1, 0])]
    rows = [(float(um) * 1e3, float(np.interp(um, n[:, 0], n[:, 1])), float(np.interp(um, k[:, 0], k[:, 1]))) for um in grid]
    last = np.array([row for row in rows if row[0] >= rows[-1][0] - 200])
    slope = float(np.polyfit(last[:, 0], last[:, 2], 1)[0])
    end = rows[-1]
    print(f"PEDOT_PSS: k rises by {slope * 1e3:.3f} per um beyond {end[0]:.0f} nm")
    write("PEDOT_PSS", thin(rows, "PEDOT_PSS") + [(LAST, end[1], end[2] + slope * (LAST - end[0]))])


def c60():
    """A model from memory: absorption bands at 4.6, 3.6, 2.75 and 2.05 eV with the strength of films
    in the literature as remembered; n by a Kramers-Kronig integral of them, 2.0 at 1000 nm."""
    bands = [(4.6, 0.65, 0.35), (3.6, 0.50, 0.28), (2.75, 0.18, 0.20), (2.05, 0.010, 0.13)]
    grid = np.linspace(0.02, 9.0, 4491)
    k_at = lambda e: sum(peak * np.exp(-((e - centre) ** 2) / (2 * width**2)) for centre, peak, width in bands)
    k = k_at(grid)

    def bump(energy):
        # Principal value: the singular part is taken off analytically.
        k0 = k_at(np.array([energy]))[0]
        safe = np.where(np.abs(grid**2 - energy**2) < 1e-9, 1.0, grid**2 - energy**2)
        inner = np.where(np.abs(grid**2 - energy**2) < 1e-9, 0.0, (grid * k - energy * k0) / safe)
        end = grid[-1]
        return 2 / math.pi * (np.trapezoid(inner, grid) + 0.5 * k0 * math.log((end - energy) / (end + energy)))

    constant = 2.0 - bump(HC / 1000)
    nms = sorted({*np.arange(280, 760, 5), *np.arange(760, 1000, 40), 1000, 1200, 1500, 2000})
    rows = [(float(nm), constant + bump(HC / nm), float(k_at(np.array([HC / nm]))[0])) for nm in nms]
    rows = [(nm, n, k if k >= 1e-5 else 0.0) for nm, n, k in rows]
    write("C60", thin(rows, "C60"))


def clear_glass():
    """Rubin 1985 from 310 nm on; below, the glass with 703 ppm of iron of Vogt et al. 2016 scaled in k
    to meet it."""
    data = yaml.safe_load((DATABASE / "glass/misc/soda-lime/nk/Rubin-clear.yml").read_text())["DATA"]
    k = next(entry for entry in data if entry["type"] == "tabulated k")["data"]
    law = lambda um: 1.5130 - 0.003169 * um**2 + 0.003962 / um**2
    pairs = [[float(cell) for cell in line.split()] for line in k.splitlines() if line.strip()]
    rows = [(um * 1e3, law(um), value) for um, value in pairs if um <= 2.0]
    iron = tabulated("glass/misc/soda-lime/nk/Vogt-703ppm.yml")
    scale = rows[0][2] / at(iron, 310, 2)
    print(f"glass_clear: iron glass times {scale:.3f} in k below 310 nm")
    uv = [(nm, law(nm / 1e3), k * scale) for nm, _, k in iron if FIRST <= nm < 309]
    write("glass_clear", thin(uv, "glass_clear, ultraviolet", small=1e-9) + thin(rows, "glass_clear", small=2e-8))


mapbi3()
bromide("MAPbBr3", "other/perovskite/CH3NH3PbBr3/nk/McCleese.yml", 2.27, 0.018)
bromide("CsPbBr3", "other/perovskite/CsPbBr3/nk/Brennan.yml", 2.29, 0.019)
marple = {
    "CdTe": sellmeier(5.68, [(1.53, 0.366)]),
    "ZnTe": sellmeier(4.27, [(3.01, 0.142)]),
}
two_six("CdTe", "main/CdTe/nk/Treharne.yml", 1.50, 0.015, marple["CdTe"])
two_six("ZnTe", "main/ZnTe/nk/Sato.yml", 2.24, 0.025, marple["ZnTe"])
two_six("CdS", "main/CdS/nk/Treharne.yml", 2.30, 0.025, None)
two_six("CdSe", "main/CdSe/nk/Ninomiya-cubic.yml", 1.65, 0.025, sellmeier(4.2243, [(1.7680, 0.2270)]))
cigs("CuInSe2", 1.01)
cigs("CuGaSe2", 1.68)
two_six("aSiH", "main/Si/nk/Franta.yml", 1.70, 0.050, None)
measured_ito = conductor("ITO", "other/mixed crystals/In2O3-SnO2/nk/Konig.yml")
light_ito(*measured_ito)
conductor("ITO_heavy", "other/mixed crystals/In2O3-SnO2/nk/Minenkov-glass.yml")
conductor("AZO", "other/doped crystals/Al-ZnO/nk/Treharne.yml")
zno()
pedot()
measured("MoO3", "main/MoO3/nk/Stelling.yml")
measured("WO3", "main/WO3/nk/Kulikova.yml")
c60()
measured("SiNx", "main/Si3N4/nk/Vogt-2.yml")
measured("Cr", "main/Cr/nk/Johnson.yml")
measured("Mo", "main/Mo/nk/Kirillova.yml")
clear_glass()
