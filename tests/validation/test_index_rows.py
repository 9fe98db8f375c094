"""Rows of segments: Bloch index, group index and decay against values computed independently of finite differences."""
import math
import unittest

from drive import check, constant, row, table
from index_answers import DB_PER_NEPER, mode_of, points_of

REFERENCE = table('index')
FINE, USUAL = '--accuracy=1e-6', '--accuracy=1e-5'


def with_below(problem, index, from_nm):
    """The same with another material below a line."""
    stripe = {'stripe': {'fill': 'below', 'across': 'x', 'from_nm': float('-inf'), 'to_nm': from_nm}}
    return {**problem, 'materials': {**problem['materials'], 'below': constant(index)},
            'cell': {**problem['cell'], 'shapes': [stripe, *problem['cell']['shapes']]}}


def segmented(case, **light):
    return row(case['pitch'], case['pitch'] * case['duty'], 220, case['polarization'], **light)


class Segmented(unittest.TestCase):
    def test_index_and_group_index(self):
        tolerance = REFERENCE['segmented_tolerance']
        for case in REFERENCE['segmented']:
            with self.subTest(**case):
                mode = mode_of(segmented(case), FINE, wavelength_nm=1550)
                check(self, 'index', mode['bloch_index'], case['index'], tolerance, digits=5.1e-8)
                check(self, 'group index', mode['group_index'], case['group'], 5 * tolerance,
                      digits=case['group_digits'])
                self.assertEqual(mode['regime'], 'subwavelength')
                self.assertEqual(mode['loss_db_per_cm']['value'], 0)

    def test_in_the_stop_band(self):
        case = REFERENCE['segmented_stopped']
        mode = mode_of(segmented(case), USUAL, wavelength_nm=1550)
        self.assertEqual(mode['regime'], 'stop-band')
        self.assertAlmostEqual(mode['bloch_index']['value'], 1550 / (2 * case['pitch']), delta=1e-12)
        self.assertIsNone(mode['group_index']['value'])
        self.assertIsNone(mode['dispersion_ps_per_nm_km']['value'])
        self.assertGreater(mode['loss_db_per_pitch']['value'], 0)
        # A mirror loses nothing.
        self.assertEqual(mode['absorption_db_per_cm']['value'], 0)
        self.assertEqual(mode['radiation_db_per_cm']['value'], 0)


class Rows(unittest.TestCase):
    def test_index_group_index_decay(self):
        for case in REFERENCE['rows']:
            problem = row(**case['row'])
            tolerance = REFERENCE['rows_tolerance'][case['row']['polarization']]
            for at in case['at']:
                with self.subTest(case['name'], wavelength=at['wavelength']):
                    mode = mode_of(problem, USUAL, wavelength_nm=at['wavelength'])
                    if 'index' in at:
                        check(self, 'index', mode['bloch_index'], at['index'], tolerance)
                    if 'group' in at:
                        check(self, 'group index', mode['group_index'], at['group'], 5 * tolerance)
                    if 'decay_per_um' in at:
                        # The accuracy asked for is one of the whole wavenumber, π/pitch + i decay.
                        self.assertEqual(mode['regime'], 'stop-band')
                        turns = at['decay_per_um'] * case['row']['pitch'] / 1000
                        check(self, 'decay', mode['loss_db_per_pitch'], DB_PER_NEPER * turns,
                              tolerance * math.pi / turns)

    def test_two_modes(self):
        # The second one reaches 1.3 µm into the oxide where there is one: farther than the first look sees.
        for case in REFERENCE['two_modes']:
            problem = row(**case['row'])
            if 'below' in case:
                problem = with_below(problem, case['below']['index'], case['below']['from'])
            [point] = points_of(problem, USUAL, '--count=2', wavelength_nm=case['wavelength'])
            self.assertEqual([mode['order'] for mode in point['modes']], [0, 1])
            for mode, expected in zip(point['modes'], case['indices']):
                check(self, case['name'], mode['bloch_index'], expected, 1e-6)


if __name__ == '__main__':
    unittest.main()
