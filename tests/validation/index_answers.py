"""What the checks of `picket index` share: closed forms, and ways to read an answer."""
import math

import mpmath

from drive import run

DB_PER_NEPER = 20 / math.log(10)
DB_PER_CM = 1e4 * DB_PER_NEPER  # of 1/µm
SPEED_OF_LIGHT = 299.792458     # µm/ps


def k0_of(wavelength_nm):
    return 2000 * math.pi / wavelength_nm


def points_of(problem, *options, wavelength_nm=None):
    """The points of a problem with one polarization, at the wavelengths of the file or others."""
    if wavelength_nm is not None:
        problem = {**problem, 'light': {**problem['light'], 'wavelength_nm': wavelength_nm}}
    [answer] = run('index', problem, *options)['results']
    return answer['points']


def mode_of(problem, *options, wavelength_nm=None):
    """The only mode of a problem at one wavelength."""
    [point] = points_of(problem, *options, wavelength_nm=wavelength_nm)
    [mode] = point['modes']
    return mode


def differences(problem, wavelength_nm, part, *options):
    """Group index and dispersion by differences of index and group index over k0 (1 ± part) and (1 ± 2 part):
    d(n k0)/dk0, and dn_g/dλ / c in ps/(nm km) at the middle. The fourth-order rule of four points."""
    wavelengths = [wavelength_nm / (1 + i * part) for i in (-2, -1, 1, 2)]
    found = points_of(problem, *options, wavelength_nm=[*reversed(wavelengths)])
    modes = [point['modes'][0] for point in reversed(found)]
    k0 = k0_of(wavelength_nm)

    def slope(values):
        return (8 * (values[2] - values[1]) - (values[3] - values[0])) / (12 * part * k0)

    group = slope([m['bloch_index']['value'] * k0_of(w) for m, w in zip(modes, wavelengths)])
    per_um = slope([m['group_index']['value'] for m in modes]) * -k0**2 / (2 * math.pi)
    return group, per_um / SPEED_OF_LIGHT * 1e6


def slab_fields(n, layers, k0, polarization):
    """Value and slope (over ε for hy) carried through layers of (index, thickness µm) from below, where the field is
    1 and grows upwards as exp(γx), γ² = k0² (n² - n_below²); and γ of the region above."""
    indices = [index for index, _ in layers]

    def weight(index):
        return index**2 if polarization == 'hy' else mpmath.mpf(1)

    below = mpmath.sqrt(n**2 - indices[0]**2) * k0
    if mpmath.re(n) < indices[0]:
        # Outgoing, exp(-iqx) with q > 0 and time exp(-iωt): the root with γ = -iq.
        below = -1j * mpmath.sqrt(indices[0]**2 - n**2) * k0
    value, slope = mpmath.mpf(1), below / weight(indices[0])
    for index, thickness in layers[1:-1]:
        q = mpmath.sqrt(index**2 - n**2) * k0
        c, s = mpmath.cos(q * thickness), mpmath.sin(q * thickness)
        value, slope = c * value + weight(index) / q * s * slope, c * slope - q / weight(index) * s * value
    above = mpmath.sqrt(n**2 - indices[-1]**2) * k0
    return value, slope, above / weight(indices[-1])


def slab_index(layers, wavelength_nm, polarization, guess):
    """The complex index of a mode of plane films near a guess: (index, thickness µm), half-spaces at both ends."""
    k0 = mpmath.mpf(k0_of(wavelength_nm))

    def residue(n):
        value, slope, above = slab_fields(n, layers, k0, polarization)
        return slope + above * value

    with mpmath.workdps(40):
        root = mpmath.findroot(residue, mpmath.mpc(guess), tol=1e-50, maxsteps=60)
    return complex(root)
