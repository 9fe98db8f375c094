"""Losses: none without a cause, leakage, absorption and radiation against closed forms and independent values."""
import math
import pathlib
import tempfile
import unittest

from drive import check, constant, rect, row, table
from index_answers import DB_PER_CM, k0_of, mode_of, points_of, slab_index
from test_index_rows import FINE, USUAL, segmented, with_below

REFERENCE = table('index')


def loss_of(extinction, wavelength_nm):
    """dB/cm of a wave with this imaginary part of its index."""
    return DB_PER_CM * k0_of(wavelength_nm) * extinction


def plain(layers, polarization, pitch=200):
    """A guide without segments, as a cell: (index, thickness µm) from below; the core is the last but one."""
    below, above = layers[0][0], layers[-1][0]
    core, width = layers[-2][0], 1000 * layers[-2][1]
    problem = row(pitch, pitch, width, polarization, tooth=core, around=above)
    at, shapes = -width / 2, []
    for number, (index, thickness) in reversed(list(enumerate(layers[1:-2]))):
        name = f'film{number}'
        problem['materials'][name] = constant(index)
        shapes.append({'stripe': {'fill': name, 'across': 'x', 'from_nm': at - 1000 * thickness, 'to_nm': at}})
        at -= 1000 * thickness
    problem['cell']['shapes'] = shapes + problem['cell']['shapes']
    return with_below(problem, below, at)


class Nothing(unittest.TestCase):
    """Guides that can't lose anything."""

    def test_lossless_guides_lose_nothing(self):
        for polarization in ('ey', 'hy'):
            for wavelength in (1450, 1550, 1700):
                mode = mode_of(segmented({'pitch': 200, 'duty': 0.5, 'polarization': polarization}), '--accuracy=1e-3',
                               wavelength_nm=wavelength)
                for name in ('loss_db_per_cm', 'absorption_db_per_cm', 'radiation_db_per_cm'):
                    self.assertEqual(mode[name]['value'], 0)
                # What the solver left in Im k is the bar.
                self.assertLess(mode['loss_db_per_cm']['uncertainty'], loss_of(1e-9, wavelength))
                self.assertEqual(mode['radiated'], [])

    def test_backwards_is_as_forwards(self):
        # Reciprocity: the cell seen from its other end has the same index, group index and loss, whatever its shape.
        shapes = [rect(70, 300, (-60, 20), 'tooth'), rect(120, 180, (45, -40), 'tooth')]
        for polarization in ('ey', 'hy'):
            for pitch, wavelength in ((280, 1550), (620, 1550)):
                found = []
                for sign in (1, -1):
                    problem = row(pitch, 1, 1, polarization, tooth=2.85)
                    scale = pitch / 280
                    problem['cell']['shapes'] = [
                        {'rect': {**s['rect'], 'length_nm': s['rect']['length_nm'] * scale,
                                  'at_nm': [sign * scale * s['rect']['at_nm'][0], s['rect']['at_nm'][1]]}}
                        for s in shapes]
                    problem['materials']['tooth'] = {'constant': {'index': 2.85, 'extinction': 1e-4}}
                    found.append(mode_of(problem, '--accuracy=1e-4', wavelength_nm=wavelength))
                ahead, back = found
                for name, part in (('bloch_index', 1e-9), ('group_index', 1e-8), ('loss_db_per_cm', 1e-7)):
                    with self.subTest(name, polarization=polarization, pitch=pitch):
                        self.assertAlmostEqual(ahead[name]['value'], back[name]['value'],
                                               delta=part * abs(ahead[name]['value']))
                self.assertGreater(ahead['loss_db_per_cm']['value'], 0)

    def test_no_mode_is_said_to_be_none(self):
        # A trench guides nothing; nor does a slab between two media below its cut-off, which lies where
        # k0 w (n² - n_s²)^½ = atan(a^½), a = (n_s² - n_c²)/(n² - n_s²) (times (n/n_c)⁴ for hy).
        n, s, c = 1.5, 1.444, 1.0
        across = k0_of(1550) * math.sqrt(n**2 - s**2)
        for polarization in ('ey', 'hy'):
            a = (s**2 - c**2) / (n**2 - s**2) * ((n / c)**4 if polarization == 'hy' else 1)
            cut_off = math.atan(math.sqrt(a)) / across
            for width in (0.7 * cut_off, 0.95 * cut_off):
                [point] = points_of(plain([(s, 0), (n, width), (c, 0)], polarization), USUAL, wavelength_nm=1550)
                self.assertEqual(point['modes'], [])
                self.assertIn('no Bloch mode', point['note'])
            # Just above it there is one, which reaches far out.
            layers = [(s, 0), (n, 1.25 * cut_off), (c, 0)]
            mode = mode_of(plain(layers, polarization), '--accuracy=1e-4', wavelength_nm=1550)
            exact = slab_index(layers, 1550, polarization, s + 0.003)
            check(self, 'above cut-off', mode['bloch_index'], exact.real, 1e-6)
            [point] = points_of(row(200, 100, 300, polarization, tooth=1.0), USUAL, wavelength_nm=1550)
            self.assertEqual(point['modes'], [])
            self.assertIn('no Bloch mode', point['note'])


class Leaking(unittest.TestCase):
    def test_segmented_above_silicon(self):
        for case in REFERENCE['leaking']:
            with self.subTest(**case):
                problem = with_below(segmented({'pitch': 200, **case}), 3.476, -110 - case['oxide'])
                mode = mode_of(problem, USUAL, wavelength_nm=1550)
                tolerance = REFERENCE['leaking_tolerance'][case['polarization']]
                self.assertAlmostEqual(mode['loss_db_per_cm']['value'], case['loss'],
                                       delta=tolerance * case['loss'] + case['digits'])
                # Downwards, along the mode itself: no order of the grating.
                [order] = mode['radiated']
                self.assertEqual((order['order'], order['side']), (0, 'low'))
                self.assertAlmostEqual(math.sin(math.radians(order['angle_deg'])),
                                       mode['bloch_index']['value'] / 3.476, delta=1e-9)
                self.assertEqual(mode['regime'], 'subwavelength')

    def test_slab_above_silicon(self):
        # Without segments: the complex root of the films' own equation.
        for polarization, guess in (('ey', 1.743), ('hy', 1.64)):
            for oxide in (0.7, 1.0, 1.5):
                with self.subTest(polarization=polarization, oxide=oxide):
                    layers = [(3.476, 0), (1.444, oxide), (1.996, 0.4), (1.444, 0)]
                    exact = slab_index(layers, 1550, polarization, guess)
                    self.assertGreater(exact.imag, 0)
                    mode = mode_of(plain(layers, polarization), USUAL, wavelength_nm=1550)
                    check(self, 'index', mode['bloch_index'], exact.real, 1e-6)
                    check(self, 'loss', mode['loss_db_per_cm'], loss_of(exact.imag, 1550), 1e-3)
                    self.assertEqual(mode['radiation_db_per_cm'], mode['loss_db_per_cm'])
                    self.assertEqual(mode['absorption_db_per_cm']['value'], 0)


class Absorbing(unittest.TestCase):
    """An extinction κ in a medium of index n adds the power loss 2 k0 κ ∂n_B/∂n, to first order."""
    EXTINCTION, STEP = 1e-5, 5e-3

    def check_medium(self, polarization, medium, material):
        def problem(change, lossy=None):
            index = {'tooth': 3.476, 'around': 1.444}
            index[medium] += change
            made = row(200, 100, 220, polarization, **index)
            if lossy:
                made['materials'][medium] = lossy
            return made

        up, down = (mode_of(problem(sign * self.STEP), FINE, wavelength_nm=1550)['bloch_index']['value']
                    for sign in (1, -1))
        expected = loss_of(self.EXTINCTION * (up - down) / (2 * self.STEP), 1550)
        mode = mode_of(problem(0, material), FINE, wavelength_nm=1550)
        for name in ('loss_db_per_cm', 'absorption_db_per_cm'):
            self.assertAlmostEqual(mode[name]['value'], expected, delta=2e-4 * expected)
        self.assertEqual(mode['radiation_db_per_cm']['value'], 0)

    def test_extinction_of_a_constant(self):
        for polarization in ('ey', 'hy'):
            for medium, index in (('tooth', 3.476), ('around', 1.444)):
                with self.subTest(polarization=polarization, medium=medium):
                    self.check_medium(polarization, medium,
                                      {'constant': {'index': index, 'extinction': self.EXTINCTION}})

    def test_extinction_of_a_table(self):
        with tempfile.TemporaryDirectory() as folder:
            path = pathlib.Path(folder) / 'lossy.csv'
            lines = ['wavelength_nm,n,k', *(f'{w},3.476,{self.EXTINCTION}' for w in (1400, 1500, 1600, 1700))]
            path.write_text('\n'.join(lines) + '\n')
            self.check_medium('hy', 'tooth', {'table': {'csv': str(path)}})

    def test_all_media_alike(self):
        # Extinction in proportion to the index, ε → ε (1 + 2iδ), is a complex frequency k0 (1 + iδ): the loss is
        # 2 k0 δ n_g, by the group index. Exact to first order in δ.
        delta = 1e-6
        for polarization in ('ey', 'hy'):
            problem = row(200, 100, 220, polarization)
            problem['materials'] = {name: {'constant': {'index': index, 'extinction': index * delta}}
                                    for name, index in (('tooth', 3.476), ('around', 1.444))}
            mode = mode_of(problem, FINE, wavelength_nm=1550)
            expected = loss_of(delta * mode['group_index']['value'], 1550)
            self.assertAlmostEqual(mode['loss_db_per_cm']['value'], expected, delta=2e-5 * expected)


class Radiating(unittest.TestCase):
    def check_orders(self, mode, pitch, wavelength, side_index):
        """Angles by the grating equation, and shares that make up the whole."""
        index = mode['bloch_index']['value']
        self.assertGreater(len(mode['radiated']), 0)
        for order in mode['radiated']:
            sine = (index + order['order'] * wavelength / pitch) / side_index[order['side']]
            self.assertAlmostEqual(math.sin(math.radians(order['angle_deg'])), sine, delta=1e-9)
        expected = {(m, side) for side, n in side_index.items() for m in range(-9, 10)
                    if abs(index + m * wavelength / pitch) < n}
        self.assertEqual({(o['order'], o['side']) for o in mode['radiated']}, expected)
        self.assertAlmostEqual(sum(o['share'] for o in mode['radiated']), 1, delta=1e-9)
        upward = sum(o['share'] for o in mode['radiated'] if o['side'] == 'high')
        # Shares by harmonics on a line, the whole by the flux through it: on different sums.
        self.assertAlmostEqual(mode['upward_share']['value'], upward, delta=1e-2)

    def test_symmetric_row(self):
        case = REFERENCE['radiating']
        for at in case['at']:
            with self.subTest(wavelength=at['wavelength']):
                mode = mode_of(row(**case['row']), USUAL, wavelength_nm=at['wavelength'])
                check(self, 'index', mode['bloch_index'], at['index'], case['tolerance']['index'])
                check(self, 'loss', mode['loss_db_per_cm'], loss_of(at['extinction'], at['wavelength']),
                      case['tolerance']['extinction'])
                self.assertEqual(mode['regime'], 'radiating')
                self.assertAlmostEqual(mode['upward_share']['value'], 0.5, delta=1e-6)
                self.check_orders(mode, 550, at['wavelength'], {'low': 1.444, 'high': 1.444})

    def test_row_between_two_media(self):
        # Air above, oxide below; some orders leave into one side only.
        for case in ({'pitch': 580, 'length': 290, 'width': 500, 'polarization': 'hy', 'tooth': 2.85, 'around': 1.0},
                     {'pitch': 640, 'length': 384, 'width': 700, 'polarization': 'ey', 'tooth': 2.0, 'around': 1.2}):
            with self.subTest(**case):
                problem = with_below(row(**case), 1.444, -case['width'] / 2)
                mode = mode_of(problem, '--accuracy=1e-4', wavelength_nm=1550)
                self.assertEqual(mode['regime'], 'radiating')
                self.check_orders(mode, case['pitch'], 1550, {'low': 1.444, 'high': case['around']})


if __name__ == '__main__':
    unittest.main()
