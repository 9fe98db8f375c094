"""Bloch index, group index, dispersion and decay of layered media against the relation of Yeh, Yariv and Hong."""
import math
import unittest

import mpmath

from drive import check, stack, table
from index_answers import DB_PER_NEPER, SPEED_OF_LIGHT, k0_of, mode_of, points_of
from test_stacks import half_trace, luke, malitson

REFERENCE = table('index')
FINE = '--accuracy=1e-8'

# On 24 and more steps to a pitch errors h², h⁴ and h⁶ are removed: what is left is below this.
EXACT = 1e-9


def wavenumber(layers_at, wavelength, pitch):
    """K of the wave below and inside the first gap, 1/µm: complex, Im K > 0."""
    cosine = half_trace(layers_at(wavelength), wavelength)
    phase = mpmath.acos(cosine)
    return mpmath.mpc(mpmath.re(phase), abs(mpmath.im(phase))) / pitch


def nitride_layers(w):
    return [(luke(w), mpmath.mpf('0.2')), (malitson(w), mpmath.mpf('0.25'))]


def nitride_problem(polarization):
    return {'format': 1, 'light': {'polarization': polarization},
            'materials': {'nitride': {'catalogue': 'nitride'}, 'oxide': {'catalogue': 'silica'}},
            'cell': {'pitch_nm': 450, 'cladding': 'oxide', 'lateral': 'uniform', 'shapes': [
                {'stripe': {'fill': 'nitride', 'across': 'z', 'from_nm': 0, 'to_nm': 200}}]}}


class Constant(unittest.TestCase):
    def test_crossing_light(self):
        for case in REFERENCE['crossing']:
            half = case['pitch'] / 2
            for polarization in ('ey', 'hy'):
                with self.subTest(pitch=case['pitch'], polarization=polarization):
                    mode = mode_of(stack([(3.476, half), (1.444, half)], polarization), FINE, wavelength_nm=1550)
                    if 'index' in case:
                        check(self, 'index', mode['bloch_index'], case['index'], EXACT, digits=case['digits'])
                        self.assertEqual(mode['regime'], 'subwavelength')
                    else:
                        check(self, 'decay', mode['loss_db_per_pitch'], case['db_per_pitch'], EXACT,
                              digits=case['digits'])
                        # The real part stands at the zone edge.
                        self.assertAlmostEqual(mode['bloch_index']['value'], 1550 / (2 * case['pitch']), delta=1e-12)
                        self.assertEqual(mode['regime'], 'stop-band')
                        self.assertIsNone(mode['group_index']['value'])

    def test_mirror(self):
        case = REFERENCE['mirror']
        for polarization in ('ey', 'hy'):
            problem = stack(case['layers'], polarization)
            passing, stopped = case['passing'], case['stopped']
            mode = mode_of(problem, FINE, wavelength_nm=passing['wavelength'])
            check(self, 'passing', mode['bloch_index'], passing['real_k_per_um'] / k0_of(passing['wavelength']), EXACT)
            mode = mode_of(problem, FINE, wavelength_nm=stopped['wavelength'])
            check(self, 'stopped', mode['loss_db_per_pitch'],
                  DB_PER_NEPER * stopped['decay_per_um'] * problem['cell']['pitch_nm'] / 1000, EXACT)


class Dispersive(unittest.TestCase):
    """Catalogue silica and nitride: their formulas are written out in test_stacks.py."""

    def test_index_group_index_dispersion(self):
        pitch = 0.45
        wavelengths = [1750, 1850, 2100]

        def group(w):
            return mpmath.diff(lambda k0: wavenumber(nitride_layers, 2 * mpmath.pi / k0, pitch).real,
                               2 * mpmath.pi / w)

        for polarization in ('ey', 'hy'):
            points = points_of(nitride_problem(polarization), FINE, wavelength_nm=wavelengths)
            for wavelength, point in zip(wavelengths, points):
                with self.subTest(polarization=polarization, wavelength=wavelength), mpmath.workdps(30):
                    [mode] = point['modes']
                    w = mpmath.mpf(wavelength) / 1000
                    index = float(wavenumber(nitride_layers, w, pitch).real / (2 * mpmath.pi / w))
                    check(self, 'index', mode['bloch_index'], index, EXACT)
                    check(self, 'group index', mode['group_index'], float(group(w)), 1e-7)
                    # By differences over ±0.2 % of the frequency: what remains is of fourth order and rounding.
                    dispersion = float(mpmath.diff(group, w)) / SPEED_OF_LIGHT * 1e6
                    check(self, 'dispersion', mode['dispersion_ps_per_nm_km'], dispersion, 1e-5)

    def test_decay_in_the_gap(self):
        pitch, wavelengths = 0.45, [1450, 1500, 1560]
        for polarization in ('ey', 'hy'):
            points = points_of(nitride_problem(polarization), FINE, wavelength_nm=wavelengths)
            for wavelength, point in zip(wavelengths, points):
                [mode] = point['modes']
                k = wavenumber(nitride_layers, mpmath.mpf(wavelength) / 1000, pitch)
                self.assertGreater(k.imag, 0)
                check(self, f'decay at {wavelength}', mode['loss_db_per_pitch'],
                      float(k.imag) * pitch * DB_PER_NEPER, EXACT)


class Bars(unittest.TestCase):
    def test_coarse_answers_are_honest(self):
        # At the least accuracy the bars are wide, and hold.
        for polarization in ('ey', 'hy'):
            for pitch in (100, 200):
                layers = [(3.476**2, pitch / 2000), (1.444**2, pitch / 2000)]
                k = wavenumber(lambda w, s=layers: s, 1.55, pitch / 1000)
                mode = mode_of(stack([(3.476, pitch / 2), (1.444, pitch / 2)], polarization), '--accuracy=1e-2',
                               wavelength_nm=1550)
                check(self, 'coarse', mode['bloch_index'], float(k.real) / k0_of(1550), 1e-5)


if __name__ == '__main__':
    unittest.main()
