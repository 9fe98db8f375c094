#!/usr/bin/env python3
"""Modes of a bent slab by Bessel functions of complex order: the reference values of
tests/unit/section/test_bend.c. Needs mpmath; takes half a minute.

With k = k0 n and order nu = beta R, fields going as exp(i nu theta): J_nu(kr) inside the bend,
A J_nu + B Y_nu in the film, H1_nu outside. E_y and its slope are continuous (TE), h_y and its slope
over n^2 (TM). E. A. J. Marcatili, Bell Syst. Tech. J. 48, 2103 (1969)."""
from mpmath import besselj, bessely, findroot, hankel1, mp, mpc, mpf, nstr, pi

mp.dps = 60
FILM, AROUND, WIDTH, WAVELENGTH = mpf(2), mpf('1.45'), mpf('0.5'), mpf('1.55')


def mismatch(order, radius, tm):
    k0 = 2 * pi / WAVELENGTH
    inner, outer = radius - WIDTH / 2, radius + WIDTH / 2

    def value_and_slope(function, index, r):
        z = k0 * index * r
        slope = (function(order - 1, z) - function(order + 1, z)) / 2
        return function(order, z), k0 * index * slope / (index**2 if tm else 1)

    u, du = value_and_slope(besselj, AROUND, inner)
    p, dp = value_and_slope(besselj, FILM, inner)
    q, dq = value_and_slope(bessely, FILM, inner)
    v, dv = value_and_slope(hankel1, AROUND, outer)
    s, ds = value_and_slope(besselj, FILM, outer)
    t, dt = value_and_slope(bessely, FILM, outer)
    a, b = u * dq - du * q, p * du - dp * u
    scale = abs(u) * abs(dq) * abs(s) * abs(dv) + abs(b * t * dv)
    return ((a * s + b * t) * dv - (a * ds + b * dt) * v) / scale


def index_of(radius, tm, guess):
    unit = 2 * pi / WAVELENGTH * radius
    starts = (guess * unit, guess * unit * (1 + mpf('1e-6')), guess * unit * mpc(1, '1e-6'))
    order = findroot(lambda nu: mismatch(nu, mpf(radius), tm), starts, solver='muller',
                     tol=mpf('1e-80'), verify=False)
    return order / unit


def main():
    for tm, guess, radii in ((False, mpf('1.8101'), (5, 7, 10, 15, 25, 35)),
                             (True, mpf('1.734'), (5, 7, 10))):
        for radius in radii:
            index = index_of(radius, tm, guess)
            print('tm' if tm else 'te', radius, nstr(index.real, 14), nstr(index.imag, 14))
            guess = index.real


if __name__ == '__main__':
    main()
