"""Bands of a square or triangular lattice of round rods, by cylindrical waves: no grid, all digits.

Around the rod at the origin the field outside is the sum over m of [A_m J_m(k r) + B_m Y_m(k r)] exp(i m θ),
k = n_out ω/c. Matching at the surface r = R gives A_m = -M_m B_m, with inside wavenumber k_in = n_in ω/c and
p = k_in/k (E along the rods) or k/k_in (H along the rods, where (1/ε) dH/dr is continuous),

    M_m = [p J_m'(k_in R) Y_m(k R) - J_m(k_in R) Y_m'(k R)] / [p J_m'(k_in R) J_m(k R) - J_m(k_in R) J_m'(k R)].

What comes in from the other rods is A_l = Σ_m S_{m-l} B_m with the lattice sums S_l = Σ_R Y_l(k R) exp(i l θ_R)
exp(-i q·R) (-1)^l over all lattice points but the origin, q the Bloch wavenumber. They are summed over the
reciprocal lattice, integrated P times to converge (S. K. Chin, N. A. Nicorovici and R. C. McPhedran, Phys. Rev.
E 49, 4590 (1994), from memory of the source). A band is where the Hermitian matrix M + S is singular.

The method is Lord Rayleigh's (Phil. Mag. 34, 481 (1892)). Lengths in units of the pitch.
"""
import math

import numpy as np
from scipy.optimize import brentq
from scipy.special import jv, jvp, yv, yvp

P = 4          # integrations of the lattice sums: terms then fall as Q^-(P + 5/2); more lose digits at low frequency
SHELLS = 24    # reciprocal vectors each way; frequencies are then good to 1e-8


def lattice_sums(k, q, highest, triangular=False):
    """S_l for l = 0 .. highest; S_-l is its complex conjugate. The triangular lattice has a row along z."""
    n = np.arange(-SHELLS, SHELLS + 1)
    n_z, n_x = np.meshgrid(n, n, indexing='ij')
    height = math.sqrt(0.75) if triangular else 1.0
    g_z = 2 * np.pi * n_z + q[0]
    g_x = 2 * np.pi * (n_x - (0.5 * n_z if triangular else 0)) / height + q[1]
    size, angle = np.hypot(g_z, g_x).ravel(), np.arctan2(g_x, g_z).ravel()
    within = size < 2 * np.pi * SHELLS * 0.85
    size, angle = size[within], angle[within]
    sums = np.zeros(highest + 1, complex)
    for l in range(highest + 1):
        terms = (k / size)**P * jv(l + P, size) / (size**2 - k**2) * np.exp(1j * l * angle)
        total = -4 * 1j**l * terms.sum() / height  # height: area of the cell
        if l == 0:
            total -= yv(P, k) + sum(math.factorial(P - n) / math.factorial(n - 1) * (2 / k)**(P - 2 * n + 2)
                                    for n in range(1, P + 1)) / np.pi
        sums[l] = total / jv(l + P, k)
    return sums


def matrix(frequency, q, radius, eps_in, eps_out, polarization, orders, triangular):
    """M + S, rows and columns scaled by |M|^-1/2 so that high orders do not drown it."""
    k0 = 2 * np.pi * frequency
    k, k_in = k0 * math.sqrt(eps_out), k0 * math.sqrt(eps_in)
    p = k_in / k if polarization == 'ey' else k / k_in
    m = np.arange(-orders, orders + 1)
    inside, slope = jv(m, k_in * radius), jvp(m, k_in * radius)
    ratio = ((p * slope * yv(m, k * radius) - inside * yvp(m, k * radius))
             / (p * slope * jv(m, k * radius) - inside * jvp(m, k * radius)))
    s = lattice_sums(k, q, 2 * orders, triangular)
    difference = m[:, None] - m[None, :]
    full = np.where(difference >= 0, s[abs(difference)], np.conj(s[abs(difference)])) + np.diag(ratio)
    scale = np.abs(ratio)**-0.5
    return scale[:, None] * full * scale[None, :]


def band_near(guess, q, radius, eps_in, eps_out, polarization, width=3e-3, orders=8, steps=7,
              triangular=False):
    """The frequency (pitch/λ) nearest to a guess where an eigenvalue of the matrix passes 0; twofold levels too.

    Eigenvalues between two poles move one way with frequency, so that the count of negative ones tells on which
    side of a band a frequency lies."""
    def eigenvalues(f):
        return np.linalg.eigvalsh(matrix(f, q, radius, eps_in, eps_out, polarization, orders, triangular))

    edges = guess * (1 + np.linspace(-width, width, steps))
    counts = [int((eigenvalues(f) < 0).sum()) for f in edges]
    roots = []
    for low, high, n_low, n_high in zip(edges, edges[1:], counts, counts[1:]):
        for passing in range(min(n_low, n_high), max(n_low, n_high)):
            root = brentq(lambda f, i=passing: eigenvalues(f)[i], low, high, xtol=1e-15, rtol=1e-14)
            if abs(eigenvalues(root)[passing]) < 1e-6:  # else a pole
                roots.append(root)
    return min(roots, key=lambda root: abs(root - guess)) if roots else None
