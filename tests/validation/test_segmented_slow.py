"""Segmented guides: stop bands and Bloch waves against independent semi-analytic values."""
import math
import unittest

from drive import bands_at, check, first_band, row, run, table

REFERENCE = table('segmented')


def problem_of(case, tooth=3.476):
    return row(case['pitch'], case['duty'] * case['pitch'], case['width'], case['polarization'], tooth=tooth,
               bridge=case.get('bridge'))


class StopBands(unittest.TestCase):
    def edges(self, cases, tooth, digits):
        for case in cases:
            if case['long'] is None:
                continue
            with self.subTest(str(case)):
                band = first_band(problem_of(case, tooth))
                self.assertTrue(band['confined'])
                for side in ('long', 'short'):
                    check(self, side, band[f'{side}_nm'], case[side], REFERENCE['tolerance'][case['polarization']],
                          digits=digits)

    def test_rows_seen_from_the_side(self):
        self.edges(REFERENCE['rows'], 3.476, REFERENCE['digits']['edge_nm'])

    def test_fine_values(self):
        self.edges(REFERENCE['fine'], 2.85, 0)

    def test_the_family_is_followed(self):
        # The edge of the odd family inside the stop band must not be taken for the even family's.
        for case in REFERENCE['strangers']:
            band = first_band(problem_of(case))
            self.assertLess(band['short_nm']['value'], case['inside_nm'])
            self.assertGreater(band['long_nm']['value'], case['inside_nm'])


class BlochWaves(unittest.TestCase):
    """At the wavenumber k = 2π n/λ of a stated Bloch index the lowest band must lie at λ."""

    def wave(self, problem, wavelength, index, polarization, digits):
        pitch = problem['cell']['pitch_nm']
        [[lowest]] = bands_at(problem, [(2 * index * pitch / wavelength, 0)], 1)
        check(self, f'{polarization} {pitch}', lowest, pitch / wavelength, REFERENCE['tolerance'][polarization],
              digits=digits / index * pitch / wavelength)  # dω/ω = dn/n_g, and n_g is above n

    def test_rows_seen_from_the_side(self):
        for case in REFERENCE['rows']:
            if case['bloch_index'] is not None:
                with self.subTest(str(case)):
                    self.wave(problem_of(case), 1550, case['bloch_index'], case['polarization'],
                              REFERENCE['digits']['bloch_index'])

    def test_fine_values(self):
        for case in REFERENCE['fine']:
            with self.subTest(case['name'], polarization=case['polarization']):
                wavelength, index = case['bloch_index']
                self.wave(problem_of(case, 2.85), wavelength, index, case['polarization'], 0)


class Squares(unittest.TestCase):
    def test_even_waves_of_a_row(self):
        case = REFERENCE['squares']
        side = 1000 * case['side']
        problem = row(1000, side, side, 'ey', tooth=math.sqrt(case['permittivity']), around=1)
        wanted = sorted(case['frequencies'].items())
        found = bands_at(problem, [(2 * k, 0) for k, _ in wanted], 1)
        for (k, frequency), [lowest] in zip(wanted, found):
            check(self, f'K = {k}', lowest, frequency, 0, digits=case['digits'])


class CommonPractice(unittest.TestCase):
    """No source, common practice of the trade: teeth of about 150 nm carry 1550 nm light as if the guide were
    solid, and teeth up to about twice as long turn it into a mirror. Platform of examples/bus_section.yaml."""

    def test_sweep_of_the_pitch_at_half_filling(self):
        lines, inside = [], []
        for tooth in range(150, 301, 25):
            band = first_band(platform(2 * tooth), '--accuracy', '1e-3')
            short_edge, long_edge = band['short_nm']['value'], band['long_nm']['value']
            state = 'clear' if long_edge < 1550 else 'inside' if short_edge is None or short_edge < 1550 else 'past'
            lines.append(f'{tooth:9d} {2 * tooth:9d} {short_edge or math.nan:11.1f} {long_edge:10.1f}   {state}')
            inside.append(state == 'inside' and short_edge is not None)
            if tooth == 150:
                self.assertEqual(state, 'clear')
                self.assertGreater(1550 - long_edge, 100)  # the usual distance designers keep
        print('\n tooth, nm pitch, nm  short, nm   long, nm   1550 nm is\n' + '\n'.join(lines))
        self.assertTrue(any(inside), 'no tooth between 150 and 300 nm makes a mirror for 1550 nm')


def platform(pitch):
    """The platform of examples/bus_section.yaml at half filling."""
    guide = {'slab': {'substrate': 'oxide', 'films': [{'fill': 'silicon', 'thickness_nm': 220}], 'cover': 'oxide',
                      'polarization': 'te'}}
    return {'format': 1, 'light': {'polarization': 'hy', 'wavelength_nm': 1550},
            'materials': {'silicon': {'catalogue': 'silicon'}, 'oxide': {'catalogue': 'silica'}, 'guide': guide},
            'cell': {'pitch_nm': pitch, 'cladding': 'oxide', 'lateral': 'open',
                     'shapes': [{'rect': {'fill': 'guide', 'length_nm': pitch / 2, 'width_nm': 450}}]}}


class BarsAreNotMadeUp(unittest.TestCase):
    def test_a_finer_answer_lies_within_the_bars_of_a_coarser_one(self):
        for polarization in ('ey', 'hy'):
            problem = row(320, 170, 410, polarization, tooth=3.1, around=1.444)
            coarse, fine = (first_band(problem, '--accuracy', accuracy) for accuracy in ('1e-2', '1e-5'))
            for quantity in ('long_nm', 'short_nm', 'attenuation_db_per_pitch'):
                off = abs(coarse[quantity]['value'] - fine[quantity]['value'])
                self.assertLessEqual(off, coarse[quantity]['uncertainty'] + fine[quantity]['uncertainty'],
                                     f'{polarization} {quantity}')

    def test_accuracy_is_met_or_said_not_to_be(self):
        for accuracy, unknowns in (('1e-3', '2e6'), ('1e-5', '2e6'), ('1e-6', '10000'), ('1e-8', '5000')):
            document = run('edges', row(320, 170, 410, 'ey', tooth=3.1, around=1.444), '--accuracy', accuracy,
                           '--unknowns', unknowns)
            band = document['results'][0]['stop_bands'][0]
            quantities = [band[q] for q in ('long_nm', 'short_nm', 'attenuation_db_per_pitch')]
            worst = max(math.inf if q['uncertainty'] is None else q['uncertainty'] / q['value'] for q in quantities)
            self.assertEqual(document['complete'], worst <= float(accuracy), f'{accuracy}: worst bar {worst:.1e}')
            self.assertEqual(document['complete'], document['shortfall'] is None)


if __name__ == '__main__':
    unittest.main()
