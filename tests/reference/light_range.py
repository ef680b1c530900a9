"""Share of the photons of a 5772 K black body in 660..870 nm that lie in 800..870 nm.

Planck's law by adaptive quadrature; checks the estimate behind `light.range`.
Run with scipy 1.17.1: prints 0.314441.
"""

import numpy as np
from scipy.integrate import quad

H, C, K = 6.62607015e-34, 299792458.0, 1.380649e-23
TEMPERATURE = 5772.0


def photons(nanometres):
    wavelength = nanometres * 1e-9
    return wavelength**-4 / np.expm1(H * C / (wavelength * K * TEMPERATURE))


share = quad(photons, 800, 870)[0] / quad(photons, 660, 870)[0]
print(f"{share:.6f}")
