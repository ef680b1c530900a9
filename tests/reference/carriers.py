"""Minority carriers by finite volumes, for tests/fixtures/carriers/collection.json.

In each slab  d/dz(D n0 psi') - D n0/L^2 psi + g = 0  with psi the excess density over its equilibrium
n0, psi = 0 at the junction, D n0 psi' = -S n0 psi at the far face, and at an inner face the flux less
S n0 psi. What arrives at the junction of unit illumination is what is collected; with g = 0 and
psi = 1 at the junction it is the dark current over q. Solved with scipy on two grids and extrapolated.

Run: python3 tests/reference/carriers.py > tests/fixtures/carriers/collection.json
"""

import json
import sys

import mpmath
import numpy as np
import scipy
from scipy.linalg import solve_banded


def flux(case, lit, cells):
    """Flux into the junction (lit) or out of it (dark), junction at z = 0 of the first slab."""
    width, diffusion, density, loss, source, faces = [], [], [], [], [], []
    at = 0.0
    for slab in case["slabs"]:
        d, D, L, n0, S = (slab[k] for k in ("thickness", "diffusion", "length", "density", "velocity"))
        h = d / cells
        centre = at + h * (np.arange(cells) + 0.5)
        width += [h] * cells
        diffusion += [D] * cells
        density += [n0] * cells
        loss += [D * n0 / L**2] * cells
        source += list(generation(case, centre, h)) if lit else [0.0] * cells
        faces.append((len(width), S * n0))
        at += d
    width, diffusion, density = map(np.array, (width, diffusion, density))
    loss, source = np.array(loss), np.array(source)
    conductance = diffusion * density / width
    n = len(width)
    diagonal = loss * width
    upper, lower, right = np.zeros(n), np.zeros(n), source.copy()
    # The junction: psi given at the face, half a cell away.
    start = 2.0 * conductance[0]
    diagonal[0] += start
    right[0] += 0.0 if lit else start
    ends = dict(faces)
    for i in range(n):
        sink = ends.get(i + 1, 0.0)
        a = 2.0 * conductance[i]
        if i + 1 == n:
            diagonal[i] += a * sink / (a + sink)
            continue
        b = 2.0 * conductance[i + 1]
        # Face value psi_f of a (psi_i - psi_f) = sink psi_f + b (psi_f - psi_j).
        whole = a + b + sink
        diagonal[i] += a * (1.0 - a / whole)
        upper[i + 1] -= a * b / whole
        lower[i] -= a * b / whole
        diagonal[i + 1] += b * (1.0 - b / whole)
    psi = solve_banded((1, 1), np.array([upper, diagonal, lower]), right)
    return start * psi[0] if lit else start * (1.0 - psi[0])


def generation(case, centre, h):
    """Cell integrals of g as the depth from the sun runs, whichever side the junction is on."""
    total = sum(slab["thickness"] for slab in case["slabs"])
    z = centre if case["junction"] == "sunward" else total - centre
    p = case["profile"]
    fine = (np.arange(4) + 0.5) / 4.0 - 0.5
    z = z[:, None] + h * fine[None, :]
    g = (
        p["down"] * np.exp(-p["decay"] * z)
        + p["up"] * np.exp(-p["decay"] * (total - z))
        + p["cosine"] * np.cos(p["wave"] * z)
        - p["sine"] * np.sin(p["wave"] * z)
    )
    return g.mean(axis=1) * h


def extrapolated(case, lit):
    coarse, fine = flux(case, lit, 20000), flux(case, lit, 40000)
    return fine + (fine - coarse) / 3.0


def slab(thickness, diffusion, length, density, velocity):
    return dict(thickness=thickness, diffusion=diffusion, length=length, density=density, velocity=velocity)


def profile(decay, wave=0.0, down=0.0, up=0.0, cosine=0.0, sine=0.0):
    return dict(decay=decay, wave=wave, down=down, up=up, cosine=cosine, sine=sine)


def cases():
    wavy = profile(2e6, 6.4e7, 2.1e6, 3e5, 2.5e5, 1.5e5)
    weak = profile(2e5, 5.5e7, 2.2e5, 1.4e5, 1.1e5, -0.6e5)
    strong = profile(3e7, 7e7, 2.8e7, 1e3, 1e5, 2e5)
    base = slab(3e-6, 5e-3, 8e-6, 1e3, 10.0)
    yield dict(name="base, wave", junction="sunward", profile=wavy, slabs=[base])
    yield dict(name="base, weak absorption and a poor rear", junction="sunward", profile=weak,
               slabs=[slab(2e-6, 2e-3, 1e-6, 1e3, 1e5)])
    yield dict(name="emitter, strong absorption and a dead surface", junction="rear", profile=strong,
               slabs=[slab(1e-7, 3e-4, 4e-7, 50.0, 1e5)])
    yield dict(name="emitter, wave", junction="rear", profile=wavy, slabs=[slab(2e-7, 3e-4, 1e-7, 50.0, 20.0)])
    yield dict(name="base of two dopings", junction="sunward", profile=weak,
               slabs=[slab(1.2e-6, 6e-3, 9e-6, 4e3, 0.0), slab(1.5e-6, 3e-3, 3e-6, 1e3, 10.0)])
    yield dict(name="emitter under a collecting window", junction="rear", profile=strong,
               slabs=[slab(8e-8, 3e-4, 4e-7, 50.0, 30.0), slab(3e-8, 1e-4, 1e-7, 0.5, 1e5)])
    yield dict(name="passivated base of one length, alpha L = 1", junction="sunward",
               profile=profile(1e6, down=1e6), slabs=[slab(1e-6, 1e-3, 1e-6, 1e3, 0.0)])


def fermi():
    """eta - ln F_1/2(eta) at given F_1/2, normalised so that F_1/2 -> exp(eta) far below the band."""
    half = lambda eta: -mpmath.polylog(1.5, -mpmath.exp(eta))
    rows = []
    for ratio in (0.1, 0.5, 1.0, 2.0, 4.0, 6.0, 8.0):
        eta = mpmath.findroot(lambda e: mpmath.re(half(e)) - ratio, mpmath.log(ratio) + 0.35 * ratio)
        rows.append([ratio, float(mpmath.re(eta) - mpmath.log(ratio))])
    return rows


def main():
    rows = []
    for case in cases():
        rows.append({**case, "collected": extrapolated(case, True), "dark": extrapolated(case, False)})
    out = {
        "source": f"tests/reference/carriers.py with scipy {scipy.__version__}, numpy {np.__version__}, "
        f"mpmath {mpmath.__version__}",
        "units": "SI; collected per unit illumination; dark in 1/m2/s; density of minority carriers in 1/m3",
        "cases": rows,
        "fermi": fermi(),
    }
    json.dump(out, sys.stdout, indent=1)
    print()


main()
