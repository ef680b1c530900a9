"""Reference values for the optics of thin films: tests/fixtures/optics/thin_films.json.

Stacks of random layers, seeded, worked out by the general-purpose Python library `tmm`
(S. J. Byrnes, arXiv:1603.02720): coherent stacks of ten absorbing films, and films mixed with
layers too thick for interference.

    pip install tmm==0.2.0 numpy
    python tests/reference/thin_films.py
"""

import importlib.metadata
import json
import pathlib
import random

import numpy
import tmm

SEED = 20260
rng = random.Random(SEED)


def film():
    absorbing = rng.random() < 0.8
    return {
        "n": round(rng.uniform(1.2, 4.5), 4),
        "k": round(10 ** rng.uniform(-5, 0.3), 6) if absorbing else 0.0,
        "nm": round(rng.uniform(2, 260), 2),
        "coherent": True,
    }


def thick():
    return {
        "n": round(rng.uniform(1.3, 3.8), 4),
        "k": round(10 ** rng.uniform(-7.5, -4.0), 9),
        "nm": round(rng.uniform(20e3, 600e3), 1),
        "coherent": False,
    }


def rear():
    return rng.choice([[1.0, 0.0], [1.0, 0.0], [0.18, 3.4], [3.6, 0.02], [1.52, 0.0]])


def solve(case):
    index = [1.0] + [s["n"] + 1j * s["k"] for s in case["sheets"]] + [complex(*case["rear"])]
    nm = [numpy.inf] + [s["nm"] for s in case["sheets"]] + [numpy.inf]
    angle = numpy.radians(case["degrees"])
    pol, light = case["polarization"], case["wavelength_nm"]
    if all(s["coherent"] for s in case["sheets"]):
        data = tmm.coh_tmm(pol, index, nm, angle, light)
        absorbed = tmm.absorp_in_each_layer(data)
    else:
        kinds = ["i"] + ["c" if s["coherent"] else "i" for s in case["sheets"]] + ["i"]
        data = tmm.inc_tmm(pol, index, nm, kinds, angle, light)
        absorbed = tmm.inc_absorp_in_each_layer(data)
    case["reflected"] = float(data["R"])
    case["transmitted"] = float(data["T"])
    case["absorbed"] = [float(a) for a in absorbed[1:-1]]
    if all(s["coherent"] for s in case["sheets"]):
        # Absorption per nm in the middle of the fifth film.
        film = 4
        middle = case["sheets"][film]["nm"] / 2
        case["density_film"] = film
        case["density_per_nm"] = float(tmm.position_resolved(film + 1, middle, data)["absor"])
    return case


def cases():
    for polarization in "sp":
        for degrees in [0, 7, 20, 33, 45, 52, 60, 68, 75, 80]:
            for _ in range(2):
                yield {"sheets": [film() for _ in range(10)], "degrees": degrees, "polarization": polarization}
    shapes = ["ftf", "t", "ffftff", "tf", "ft", "ftft", "fftfftff", "ttf", "ftfftft"]
    for polarization in "sp":
        for degrees in [0, 25, 55, 80]:
            for shape in shapes:
                sheets = [film() if s == "f" else thick() for s in shape]
                yield {"sheets": sheets, "degrees": degrees, "polarization": polarization}


def main():
    rows = []
    for case in cases():
        case["wavelength_nm"] = round(rng.uniform(300, 1800), 1)
        case["rear"] = rear()
        rows.append(solve(case))
    out = pathlib.Path(__file__).parent.parent / "fixtures" / "optics" / "thin_films.json"
    head = {
        "source": "Python library tmm %s with numpy %s, seed %d, by tests/reference/thin_films.py"
        % (importlib.metadata.version("tmm"), numpy.__version__, SEED)
    }
    lines = ",\n".join(json.dumps(row) for row in rows)
    out.write_text('{"source": %s, "cases": [\n%s\n]}\n' % (json.dumps(head["source"]), lines))
    print(len(rows), "cases")


main()
