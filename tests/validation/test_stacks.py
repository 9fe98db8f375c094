"""One-dimensional stacks against the dispersion relation of Yeh, Yariv and Hong and against stated values."""
import math
import unittest

import mpmath

from drive import bands_at, check, first_band, run, stack, table

DB_PER_NEPER = 20 / math.log(10)
REFERENCE = table('stacks')

# Free of dispersion and of truncation: what remains is rounding of eigenvalues and of the file's numbers.
EXACT = 1e-10


def half_trace(layers, wavelength, in_plane=0, polarization='ey'):
    """cos KΛ of a stack of (permittivity, thickness): half the trace of the product of the layers' matrices.

    For two layers this is cos k1a cos k2b - ½(s + 1/s) sin k1a sin k2b (Yeh, Yariv and Hong 1977)."""
    k0 = 2 * mpmath.pi / wavelength
    product = mpmath.eye(2)
    for permittivity, thickness in layers:
        k = mpmath.sqrt(permittivity * k0**2 - mpmath.mpf(in_plane)**2)
        p = k if polarization == 'ey' else k / permittivity
        product = mpmath.matrix([[mpmath.cos(k * thickness), mpmath.sin(k * thickness) / p],
                                 [-p * mpmath.sin(k * thickness), mpmath.cos(k * thickness)]]) * product
    return (product[0, 0] + product[1, 1]).real / 2


def edge_near(layers_at, guess, **more):
    """The wavelength near a guess at which cos KΛ = -1; layers_at(wavelength) gives the layers."""
    with mpmath.workdps(30):
        return float(mpmath.findroot(lambda w: half_trace(layers_at(w), w, **more) + 1,
                                     (guess, guess * (1 + 1e-6)), tol=1e-40, verify=False))


def layers_of(case):
    e1, e2 = case['permittivity']
    share = case['first_share']
    if share == 'quarter wave':
        share = math.sqrt(e2) / (math.sqrt(e1) + math.sqrt(e2))
    return [(e1, share), (e2, 1 - share)]


def problem_of(case, polarization):
    return stack([(math.sqrt(e), 1000 * d) for e, d in layers_of(case)], polarization)


class Tables(unittest.TestCase):
    def test_stated_edges_and_gaps(self):
        digits = REFERENCE['digits']
        for case in REFERENCE['stacks']:
            for polarization in ('ey', 'hy'):
                with self.subTest(case['name'], polarization=polarization):
                    band = first_band(problem_of(case, polarization))
                    low, high = 1000 / band['long_nm']['value'], 1000 / band['short_nm']['value']
                    self.assertAlmostEqual(low, case['low_edge'], delta=digits['edge'])
                    self.assertAlmostEqual(high, case['high_edge'], delta=digits['edge'])
                    self.assertAlmostEqual(100 * 2 * (high - low) / (high + low), case['gap_percent'],
                                           delta=digits['gap_percent'])

    def test_edges_to_all_digits(self):
        for case in REFERENCE['stacks']:
            layers = layers_of(case)
            for polarization in ('ey', 'hy'):
                band = first_band(problem_of(case, polarization))
                for side, guess in (('long_nm', case['low_edge']), ('short_nm', case['high_edge'])):
                    with self.subTest(case['name'], polarization=polarization, side=side):
                        exact = 1000 * edge_near(lambda w, s=layers: s, 1 / guess)
                        check(self, case['name'], band[side], exact, EXACT)

    def test_crossing_light(self):
        # On the wave's own wavenumber the frequency must be the one it was given for.
        for case in REFERENCE['crossing']:
            half = case['pitch_nm'] / 2
            k = 2 * case['bloch_index'] * case['pitch_nm'] / 1550
            [[lowest]] = bands_at(stack([(3.476, half), (1.444, half)]), [(k, 0)], 1)
            check(self, 'crossing', lowest, case['pitch_nm'] / 1550, 1e-12,
                  digits=case['digits'] / 2.5 * case['pitch_nm'] / 1550)  # df/f = dn/n_g, n_g above 2.5


class QuarterWave(unittest.TestCase):
    def test_gap_and_decay_in_closed_form(self):
        for high, low in ((3.476, 1.444), (2.4, 1.45), (1.996, 1.444), (1.46, 1.444)):
            with self.subTest(high=high, low=low):
                band = first_band(stack([(high, 250 / high), (low, 250 / low)], 'ey'))
                long_edge, short_edge = band['long_nm']['value'], band['short_nm']['value']
                centre = 0.5 * (1 / long_edge + 1 / short_edge)
                self.assertAlmostEqual(centre, 1 / 1000, delta=EXACT / 1000)
                gap = (1 / short_edge - 1 / long_edge) / centre
                expected = 4 / math.pi * math.asin((high - low) / (high + low))
                self.assertAlmostEqual(gap, expected, delta=2 * EXACT)
                # The field falls by n_low/n_high per pitch in the middle of the gap, where it falls most.
                check(self, 'decay', band['attenuation_db_per_pitch'], DB_PER_NEPER * math.log(high / low), 1e-9)

    def test_mirror(self):
        case = REFERENCE['quarter_wave_mirror']
        problem = stack(case['layers'])
        pitch = problem['cell']['pitch_nm']
        band = first_band(problem)
        check(self, 'long', band['long_nm'], 1000 * case['long_um'], case['tolerance'])
        check(self, 'short', band['short_nm'], 1000 * case['short_um'], case['tolerance'])
        check(self, 'decay', band['attenuation_db_per_pitch'],
              DB_PER_NEPER * case['decay_per_um_at_centre'] * pitch / 1000, case['tolerance'])
        k = case['real_k_per_um']
        [[lowest]] = bands_at(problem, [(k['value'] * pitch / 1000 / math.pi, 0)], 1)
        check(self, 'below the gap', lowest, pitch / 1000 / k['at_um'], case['tolerance'])


class Oblique(unittest.TestCase):
    def test_three_layers_at_fixed_in_plane_wavenumber(self):
        case = REFERENCE['three_layers']
        for polarization in ('ey', 'hy'):
            problem = stack(case['layers'], polarization, lateral_span_nm=1000)
            pitch = problem['cell']['pitch_nm']
            kx = case['in_plane_rad_per_um'] / math.pi
            centre, boundary = bands_at(problem, [(0, kx), (1, kx)], 6)
            low, high = case['range_um']
            for place, found in (('centre', centre), ('boundary', boundary)):
                inside = [q for q in found if low < pitch / 1000 / q['value'] < high]
                self.assertEqual(len(inside), len(case[polarization][place]), f'{polarization} {place}')
                for q, wavelength in zip(inside, case[polarization][place]):
                    check(self, f'{polarization} {place}', q, pitch / 1000 / wavelength, case['tolerance'])


class Lamellae(unittest.TestCase):
    """Long waves: the exact index of each wave, and what the second-order average is worth."""

    def test_exact_waves(self):
        case = REFERENCE['lamellae']
        layers = [(math.sqrt(e), 500) for e in case['permittivity']]
        for wave in case['waves']:
            part = wave['pitch_over_wavelength']
            for kind, polarization in (('along_e_parallel', 'ey'), ('along_e_across', 'hy'), ('across', 'ey'),
                                       ('across', 'hy')):
                with self.subTest(kind, polarization=polarization, part=part):
                    k = 2 * math.sqrt(wave[kind]) * part
                    wavenumber = (k, 0) if kind == 'across' else (0, k)
                    problem = stack(layers, polarization, lateral_span_nm=1000)
                    [[lowest]] = bands_at(problem, [wavenumber], 1)
                    check(self, kind, lowest, part, case['tolerance'])

    def test_estimate_becomes_exact_for_weak_contrast(self):
        # Second order: what is left out is of the fourth order in the contrast, and the edges' mean deviates from
        # the Bragg condition in second order.
        errors = []
        for contrast in (0.4, 0.2, 0.1):
            problem = stack([(2 + contrast / 2, 250), (2 - contrast / 2, 250)])
            estimate = run('edges', problem)['results'][0]['estimate']
            errors.append(abs(estimate['error_nm']['value']) / estimate['centre_nm'])
        self.assertLess(errors[-1], 2e-3)
        for wide, narrow in zip(errors, errors[1:]):
            self.assertAlmostEqual(math.log2(wide / narrow), 2, delta=0.2)


# Written out here so that the tool's catalogue is held against the formulas themselves. λ in µm.
def malitson(w):  # silica, I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965) (S)
    pairs = ((0.6961663, 0.0684043), (0.4079426, 0.1162414), (0.8974794, 9.896161))
    return 1 + sum(b * w**2 / (w**2 - mpmath.mpf(c)**2) for b, c in pairs)


def luke(w):  # nitride, K. Luke et al., Opt. Lett. 40, 4823 (2015) (S)
    pairs = ((3.0249, 0.1353406), (40314, 1239.842))
    return 1 + sum(b * w**2 / (w**2 - mpmath.mpf(c)**2) for b, c in pairs)


class Dispersive(unittest.TestCase):
    def test_edges_of_catalogue_materials(self):
        for pitch, first in ((0.4625, 0.194), (0.55, 0.3), (0.3, 0.1)):
            layers_at = lambda w, a=first, p=pitch: [(luke(w), a), (malitson(w), p - a)]
            problem = {'format': 1, 'light': {'polarization': 'both'},
                       'materials': {'nitride': {'catalogue': 'nitride'}, 'oxide': {'catalogue': 'silica'}},
                       'cell': {'pitch_nm': 1000 * pitch, 'cladding': 'oxide', 'lateral': 'uniform', 'shapes': [
                           {'stripe': {'fill': 'nitride', 'across': 'z', 'from_nm': 0, 'to_nm': 1000 * first}}]}}
            for answer in run('edges', problem)['results']:
                band = answer['stop_bands'][0]
                for side in ('long_nm', 'short_nm'):
                    with self.subTest(pitch=pitch, polarization=answer['polarization'], side=side):
                        exact = 1000 * edge_near(layers_at, band[side]['value'] / 1000)
                        check(self, side, band[side], exact, 1e-8)

    def test_bands_of_catalogue_materials(self):
        # At an oblique wavenumber: cos KΛ of the answer must be that of the wavenumber asked for.
        for polarization in ('ey', 'hy'):
            problem = {'format': 1, 'light': {'polarization': polarization},
                       'materials': {'nitride': {'catalogue': 'nitride'}, 'oxide': {'catalogue': 'silica'}},
                       'cell': {'pitch_nm': 500, 'cladding': 'oxide', 'lateral': 'uniform', 'lateral_span_nm': 1000,
                                'shapes': [{'stripe': {'fill': 'nitride', 'across': 'z', 'from_nm': -100,
                                                       'to_nm': 100}}]}}
            kz, kx = 0.7, 1.1
            [lowest] = bands_at(problem, [(kz, kx)], 3)
            for found in lowest:
                wavelength = 0.5 / found['value']
                layers = [(luke(wavelength), 0.2), (malitson(wavelength), 0.3)]
                trace = half_trace(layers, wavelength, in_plane=kx * math.pi, polarization=polarization)
                slope = mpmath.diff(lambda w: half_trace([(luke(w), 0.2), (malitson(w), 0.3)], w,
                                                         in_plane=kx * math.pi, polarization=polarization), wavelength)
                off = abs((trace - math.cos(kz * math.pi)) / slope) / wavelength
                self.assertLess(off, 1e-8)
                self.assertLessEqual(off, found['uncertainty'] / found['value'])


if __name__ == '__main__':
    unittest.main()
