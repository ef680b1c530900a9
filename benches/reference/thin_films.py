"""Times the stack of benches/wave.rs in Python, one turn for each line of input.

A first line names the versions; each turn gives ns per layer and wavelength of
- vectorised numpy: fields carried up the stack for all wavelengths at once, with arrays that are
  made once and reused, sine, cosine and exponential taken of real arrays, and every share written
  into one table;
- the library `tmm`, wavelength by wavelength, on some of them.
"""

import importlib.metadata
import sys
import time

import numpy
import tmm

LAYERS, WAVELENGTHS, SOME = 15, 2000, 8
light = 300e-9 + 1500e-9 * numpy.arange(WAVELENGTHS) / (WAVELENGTHS - 1)


def index(n, k):
    return n + 0.02e-12 / light**2 + 1j * k * 600e-9 / light


films = [index([1.5, 3.4][j % 2], 1e-3 * (j + 1)) for j in range(LAYERS)]
depth = [(40.0 + 30.0 * j) * 1e-9 for j in range(LAYERS)]
rear = index(3.6, 0.05)


def plain():
    """As it is usually written: one expression a line."""
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


k2 = 4 * numpy.pi / light
turn, e, h, ye, a, b = (numpy.empty(WAVELENGTHS, complex) for _ in range(6))
path, size, square, weight = (numpy.empty(WAVELENGTHS) for _ in range(4))
flux, gains = numpy.empty((LAYERS + 1, WAVELENGTHS)), numpy.empty((LAYERS, WAVELENGTHS))


def norm(z, out):
    """|z|² without the square root of abs."""
    numpy.multiply(z.real, z.real, out=out)
    numpy.multiply(z.imag, z.imag, out=square)
    numpy.add(out, square, out=out)


def net(e, h, out):
    """Re(e h*)."""
    numpy.multiply(e.real, h.real, out=out)
    numpy.multiply(e.imag, h.imag, out=square)
    numpy.add(out, square, out=out)


def reusing():
    """The same without a new array in the loop, and without complex functions."""
    e[:] = 1
    h[:] = rear
    net(e, h, flux[LAYERS])
    for j in range(LAYERS - 1, -1, -1):
        n = films[j]
        numpy.multiply(k2, depth[j], out=path)
        numpy.multiply(path, n.imag, out=size)
        numpy.negative(size, out=size)
        numpy.exp(size, out=size)
        numpy.multiply(path, n.real, out=path)
        numpy.cos(path, out=turn.real)
        numpy.sin(path, out=turn.imag)
        numpy.multiply(turn, size, out=turn)
        numpy.multiply(n, e, out=ye)
        numpy.add(h, ye, out=a)
        numpy.subtract(h, ye, out=b)
        numpy.multiply(turn, b, out=b)
        numpy.subtract(a, b, out=e)
        numpy.add(a, b, out=h)
        numpy.multiply(n, h, out=h)
        net(e, h, flux[j])
        norm(n, gains[j])
        numpy.multiply(gains[j], size, out=gains[j])
    numpy.add(h, e, out=a)
    norm(a, weight)
    numpy.subtract(e, h, out=b)
    norm(b, path)
    reflected = path / weight
    numpy.divide(4, weight, out=weight)
    flux[0] *= weight
    for j in range(LAYERS):
        weight[:] *= gains[j]
        weight[:] *= 4
        flux[j + 1] *= weight
    return reflected, flux[:-1] - flux[1:], flux[-1]


def library(at):
    n = [1.0] + [film[at] for film in films] + [rear[at]]
    d = [numpy.inf] + [1e9 * x for x in depth] + [numpy.inf]
    data = tmm.coh_tmm("s", n, d, 0.0, 1e9 * light[at])
    return data["R"], tmm.absorp_in_each_layer(data)


some = range(0, WAVELENGTHS, WAVELENGTHS // SOME)
for vectorised in (plain, reusing):
    reflected, absorbed, _ = vectorised()
    for at in some:
        r, shares = library(at)
        assert abs(r - reflected[at]) < 1e-9
        assert max(abs(shares[j + 1] - absorbed[j][at]) for j in range(LAYERS)) < 1e-9


def seconds(work):
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def once(work, cells):
    """The better of two runs after one to warm up, ns per cell."""
    work()
    return 1e9 * min(seconds(work), seconds(work)) / cells


print(f"numpy {numpy.__version__} and tmm {importlib.metadata.version('tmm')}", flush=True)
for _ in sys.stdin:
    cells = LAYERS * WAVELENGTHS
    tmm_ns = once(lambda: [library(at) for at in some], LAYERS * len(some))
    print(once(plain, cells), once(reusing, cells), tmm_ns, flush=True)
