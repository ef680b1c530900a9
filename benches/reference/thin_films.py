"""Times the stack of benches/wave.rs in Python: ns per layer and wavelength, one line each.

Vectorised numpy (fields carried up the stack, all wavelengths at once) and the library `tmm`
(wavelength by wavelength, on some of them).
"""

import statistics
import time

import numpy
import tmm

LAYERS, WAVELENGTHS, SOME = 15, 2000, 100
light = 300e-9 + 1500e-9 * numpy.arange(WAVELENGTHS) / (WAVELENGTHS - 1)


def index(n, k):
    return n + 0.02e-12 / light**2 + 1j * k * 600e-9 / light


films = [index([1.5, 3.4][j % 2], 1e-3 * (j + 1)) for j in range(LAYERS)]
depth = [(40.0 + 30.0 * j) * 1e-9 for j in range(LAYERS)]
rear = index(3.6, 0.05)


def vectorised():
    e, h = numpy.ones_like(rear), rear
    flux, gains = [(e * h.conj()).real], []
    for n, d in zip(reversed(films), reversed(depth)):
        turn = numpy.exp(4j * numpy.pi / light * n * d)
        a, b = h + n * e, turn * (h - n * e)
        e, h = (a - b), n * (a + b)
        flux.append((e * h.conj()).real)
        gains.append(4 * abs(n) ** 2 * abs(turn))
    weight = 4 / abs(h + e) ** 2
    reflected = abs((e - h) / (e + h)) ** 2
    shares = []
    for j in range(LAYERS):
        shares.append(flux[LAYERS - j] * weight)
        weight = weight * gains[LAYERS - 1 - j]
    shares.append(flux[0] * weight)
    return reflected, [above - below for above, below in zip(shares, shares[1:])], shares[-1]


def library(at):
    n = [1.0] + [film[at] for film in films] + [rear[at]]
    d = [numpy.inf] + [1e9 * x for x in depth] + [numpy.inf]
    data = tmm.coh_tmm("s", n, d, 0.0, 1e9 * light[at])
    return data["R"], tmm.absorp_in_each_layer(data)


def timed(work, runs):
    times = []
    for _ in range(runs):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return statistics.median(times)


reflected, absorbed, _ = vectorised()
some = range(0, WAVELENGTHS, WAVELENGTHS // SOME)
for at in some:
    r, a = library(at)
    assert abs(r - reflected[at]) < 1e-9
    assert max(abs(a[j + 1] - absorbed[j][at]) for j in range(LAYERS)) < 1e-9
print("numpy", 1e9 * timed(vectorised, 21) / LAYERS / WAVELENGTHS)
print("tmm", 1e9 * timed(lambda: [library(at) for at in some], 5) / LAYERS / SOME)
