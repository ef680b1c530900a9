"""Current-voltage curves of junctions and strings, independent of the program under test.

- one diode with series resistance and shunt: the closed form in Lambert's W (Jain and Kapoor, Sol.
  Energy Mater. Sol. Cells 81, 269 (2004)) with mpmath's lambertw at 30 digits, beside
  scipy.special.lambertw where its argument does not overflow;
- Bishop's breakdown term (Solar Cells 25, 73 (1988)) by bisection;
- three junctions of two diodes in series, and the same with light sent down, by bisection nested in
  bisection with 30 digits; the maximum power point by dense sampling;
- a tunnel junction past its peak: the whole curve against the voltage of the tunnel junction, taken
  from open circuit down.

    python3 tests/reference/curves.py > tests/fixtures/circuit/curves.json
"""

import json
import sys

import mpmath as mp
import numpy as np
import scipy
from scipy.optimize import brentq
from scipy.special import lambertw

mp.mp.dps = 30
KT = mp.mpf("0.025692579")


def one_diode():
    rows = []
    for jph, j0, rs, rsh in [
        (138.0, 1e-16, 0.0, 0.05),
        (300.0, 1e-9, 2e-4, 0.02),
        (350.0, 1e-14, 1e-4, 10.0),
        (7e4, 1e-15, 2e-6, 1.0),
    ]:
        jph_, j0_, rs_, rsh_ = map(mp.mpf, (jph, j0, rs, rsh))
        for voltage in [-5.0, -1.0, -0.1, 0.0, 0.3, 0.6, 0.8, 1.0, 1.05]:
            v = mp.mpf(voltage)
            if rs == 0.0:
                current = jph_ - j0_ * mp.expm1(v / KT) - v / rsh_
            else:
                a = rs_ * j0_ * rsh_ / (KT * (rs_ + rsh_))
                b = rsh_ * (rs_ * (jph_ + j0_) + v) / (KT * (rs_ + rsh_))
                w = mp.lambertw(a * mp.exp(b))
                current = (rsh_ * (jph_ + j0_) - v) / (rs_ + rsh_) - KT / rs_ * w
                plain = lambertw(float(a) * np.exp(float(b))).real if b < 700 else None
                if plain is not None:
                    assert abs(plain - float(w)) <= 1e-12 * max(1.0, float(w)), (plain, w)
            rows.append([jph, j0, rs, rsh, voltage, float(mp.re(current))])
    return rows


def bishop():
    rows = []
    for voltage_b in [6.0, 15.0]:
        a, m, jph, j01, g = 0.1, 3.4, 138.0, 1e-16, 0.01

        def at(v):
            avalanche = a * g * v * (1 + v / voltage_b) ** -m if v < 0 else a * g * v
            return jph - j01 * np.expm1(v / float(KT)) - g * v - avalanche

        for current in [138.001, 138.2, 140.0, 200.0, 2e4]:
            low = -voltage_b * (1 - 1e-12)
            voltage = brentq(lambda v: at(v) - current, low, 0.0, xtol=1e-15, rtol=1e-15)
            rows.append([voltage_b, current, voltage])
    return rows


JUNCTIONS = [
    # photocurrent, j01, j02, shunt conductance
    (138.0, 2e-21, 3e-10, 0.001),
    (141.0, 4e-15, 2e-7, 0.002),
    (190.0, 3e-3, 0.0, 0.5),
]
RESISTANCE = 2e-6
# What the junction below gets of each junction's j01 current.
SENT = [0.4, 0.6]


def dark(j, v):
    _, j01, j02, g = JUNCTIONS[j]
    return j01 * mp.expm1(v / KT) + j02 * mp.expm1(v / (2 * KT)) + g * v


def own_voltage(j, current, extra):
    """V with J_ph + extra - dark(V) = current, by bisection."""
    low, high = mp.mpf(-300), mp.mpf(3)
    for _ in range(110):
        middle = (low + high) / 2
        if JUNCTIONS[j][0] + extra - dark(j, middle) > current:
            low = middle
        else:
            high = middle
    return (low + high) / 2


def voltages(current, sent):
    extra, found = mp.mpf(0), []
    for j in range(3):
        v = own_voltage(j, current, extra)
        found.append(v)
        if sent and j < 2:
            extra = SENT[j] * JUNCTIONS[j][1] * mp.expm1(v / KT)
    return found


def series():
    rows = []
    for sent in [False, True]:
        for voltage in [-4.0, -1.0, 0.0, 1.0, 2.0, 2.4, 2.6, 2.75]:
            low, high = mp.mpf(-2000), mp.mpf(300)
            for _ in range(110):
                middle = (low + high) / 2
                if sum(voltages(middle, sent)) - middle * RESISTANCE > voltage:
                    low = middle
                else:
                    high = middle
            current = (low + high) / 2
            rows.append([sent, voltage, float(current), [float(v) for v in voltages(current, sent)]])
    return rows


def best():
    """Greatest power by sampling the current three times, each time around the best."""
    rows = []
    for sent in [False, True]:
        low, high = 100.0, 150.0
        for _ in range(4):
            grid = np.linspace(low, high, 60)
            power = [float(j * (sum(voltages(j, sent)) - j * RESISTANCE)) for j in grid]
            at = int(np.argmax(power))
            low, high = grid[max(at - 1, 0)], grid[min(at + 1, 59)]
        rows.append([sent, grid[at], power[at]])
    return rows


def tunnel():
    """Peak 100 A/m2 at 0.1 V, valley 10 A/m2, under two diodes of 140 and 150 A/m2."""
    peak, peak_v, valley, valley_v, c = 100.0, 0.1, 10.0, 0.6, 10.0
    kt = float(KT)
    junctions = [(140.0, 1e-20), (150.0, 1e-15)]
    own = np.concatenate([np.linspace(0, 0.2, 200001), np.linspace(0.2, 2.0, 1800001)])
    x = own / peak_v
    current = peak * x * np.exp(1 - x) + valley * (np.exp(c * (own - valley_v)) - np.exp(-c * valley_v))
    terminal = -own.copy()
    with np.errstate(invalid="ignore"):
        for jph, j01 in junctions:
            terminal += kt * np.log1p((jph - current) / j01)
    keep = np.isfinite(terminal)
    own, current, terminal = own[keep], current[keep], terminal[keep]
    crest = int(np.argmax(np.where(own < 0.2, current, 0)))
    rows = []
    for voltage in [1.0, 1.2, 1.4, 1.5, 1.6, 1.75, 1.9, 2.05, 2.2]:
        # From open circuit down: before the crest while that voltage is met there, else the
        # furthest crossing beyond it.
        side = slice(0, crest + 1) if voltage >= terminal[crest] else slice(crest, None)
        v, j = terminal[side], current[side]
        cross = np.nonzero((v[:-1] >= voltage) & (v[1:] < voltage))[0]
        if not len(cross):
            continue
        at = cross[-1]
        share = (v[at] - voltage) / (v[at] - v[at + 1])
        rows.append([voltage, float(j[at] + share * (j[at + 1] - j[at]))])
    return {"crest_v": float(own[crest]), "dip_v": float(terminal[crest]), "rows": rows}


json.dump(
    {
        "by": f"mpmath {mp.__version__}, numpy {np.__version__}, scipy {scipy.__version__}",
        "one_diode": one_diode(),
        "bishop": bishop(),
        "series": series(),
        "best": best(),
        "tunnel": tunnel(),
    },
    sys.stdout,
    indent=1,
)
print()
