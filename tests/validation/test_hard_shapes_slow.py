"""Shapes that grids dislike: right within the bar, or declined with a reason, never silently wrong."""
import math
import unittest

from drive import bands_at, first_band, rect, run


def guide(polarization, pitch, shapes, lateral='open', wavelength=1550, **cell):
    constants = {'oxide': 1.444, 'silicon': 3.476, 'nitride': 2.0}
    return {'format': 1, 'light': {'polarization': polarization, 'wavelength_nm': wavelength},
            'materials': {name: {'constant': {'index': index}} for name, index in constants.items()},
            'cell': {'pitch_nm': pitch, 'cladding': 'oxide', 'lateral': lateral, 'shapes': shapes, **cell}}


def tooth(length, width, at=(0, 0), fill='silicon'):
    return rect(length, width, at, fill)


def bloch_index(problem, *options):
    [mode] = run('index', problem, *options)['results'][0]['points'][0]['modes']
    return mode['bloch_index']


def edges(problem, *options):
    """Both edges, by default on the coarsest grids: what must be the same is the same on any."""
    band = first_band(problem, *(options or ('--accuracy', '1e-2')))
    return [band['long_nm'], band['short_nm']]


class Hard(unittest.TestCase):
    def same(self, a, b, tolerance):
        """Two answers that must be one: values and bars."""
        for p, q in zip(a, b):
            self.assertAlmostEqual(p['value'], q['value'], delta=tolerance * q['value'])
            self.assertAlmostEqual(p['uncertainty'], q['uncertainty'], delta=tolerance * q['value'])

    def honest(self, coarse, fine):
        """A coarser and a finer answer, each with its bar, agree within the bars; the finer bar is smaller."""
        self.assertIsNotNone(coarse['uncertainty'], coarse.get('note'))
        self.assertLess(fine['uncertainty'], coarse['uncertainty'])
        self.assertLessEqual(abs(coarse['value'] - fine['value']), coarse['uncertainty'] + fine['uncertainty'])


class Limits(Hard):
    """Cells that are something simpler in truth."""

    def test_a_tooth_as_long_as_the_pitch_is_a_slab(self):
        # 220 nm of 3.476 in 1.444 at 1550 nm: 2.8477822434 and 2.0533196788 by the transfer matrix (F).
        film = {'format': 1, 'light': {'wavelength_nm': 1550},
                'materials': {'oxide': {'constant': {'index': 1.444}}, 'silicon': {'constant': {'index': 3.476}}},
                'slab': {'substrate': 'oxide', 'films': [{'fill': 'silicon', 'thickness_nm': 220}], 'cover': 'oxide'}}
        exact = {answer['polarization']: answer['points'][0]['modes'][0]['index']['value']
                 for answer in run('slab', film)['results']}
        for polarization, slab, stated in (('ey', 'te', 2.8477822434), ('hy', 'tm', 2.0533196788)):
            self.assertAlmostEqual(exact[slab], stated, delta=1e-10)
            found = bloch_index(guide(polarization, 300, [tooth(300, 220)]), '--accuracy', '1e-8')
            self.assertLessEqual(abs(found['value'] - exact[slab]), found['uncertainty'] + 1e-12)
            self.assertAlmostEqual(found['value'], exact[slab], delta=1e-8)

    def test_without_contrast_a_tooth_is_not_there(self):
        for polarization in ('ey', 'hy'):
            shapes = [tooth(300, 220), tooth(130, 220, fill='silicon'), tooth(130, 100)]
            plain = bloch_index(guide(polarization, 300, [tooth(300, 220)]))
            self.same([bloch_index(guide(polarization, 300, shapes))], [plain], 1e-10)

    def test_a_tooth_across_the_boundary(self):
        # The same row, cut elsewhere.
        for polarization in ('ey', 'hy'):
            self.same(edges(guide(polarization, 340, [tooth(170, 300, at=(170, 0))])),
                      edges(guide(polarization, 340, [tooth(170, 300)])), 1e-9)


class Neighbours(Hard):
    """Shapes that touch, overlap, or nearly do."""

    def setUp(self):
        self.one = {p: edges(guide(p, 340, [tooth(170, 300)])) for p in ('ey', 'hy')}

    def test_pieces_make_a_whole(self):
        pieces = ([tooth(85, 300, (-42.5, 0)), tooth(85, 300, (42.5, 0))],        # touching
                  [tooth(120, 300, (-25, 0)), tooth(120, 300, (25, 0))],          # overlapping
                  [tooth(170, 150, (0, -75)), tooth(170, 150, (0, 75))],          # one on the other
                  [tooth(170, 300, fill='nitride'), tooth(170, 300)])             # covered without rest
        for polarization, one in self.one.items():
            for shapes in pieces:
                with self.subTest(polarization, shapes=shapes):
                    self.same(edges(guide(polarization, 340, shapes)), one, 1e-10)

    def test_edges_off_by_rounding_are_one_edge(self):
        off = 1e-9  # nm
        pieces = ([tooth(85, 300, (-42.5, 0)), tooth(85, 300 + off, (42.5, 0))],
                  [tooth(85, 300, (-42.5, 0)), tooth(85 - off, 300, (42.5 + off / 2, 0))],
                  [tooth(85, 300, (-42.5, 0)), tooth(85, 300, (42.5 - off, 0))])
        for polarization, one in self.one.items():
            for shapes in pieces:
                with self.subTest(polarization, shapes=shapes):
                    self.same(edges(guide(polarization, 340, shapes)), one, 1e-9)

    def test_small_steps_change_little_or_are_declined(self):
        # Half the tooth is wider by a step: the edge moves by about half of what the whole would move it. hy has two
        # singular corners there that coarse grids cannot part: then there is no bar, and the note says why.
        for polarization, one in self.one.items():
            wide = edges(guide(polarization, 340, [tooth(170, 301)]))
            for step in (1e-3, 1e-2, 1e-1):
                shapes = [tooth(85, 300, (-42.5, 0)), tooth(85, 300 + step, (42.5, 0))]
                for found, plain, other in zip(edges(guide(polarization, 340, shapes)), one, wide):
                    if found['uncertainty'] is None:
                        self.assertEqual(polarization, 'hy')
                        self.assertIn('too close together', found['note'])
                        self.assertAlmostEqual(found['value'], plain['value'], delta=2e-4 * plain['value'])
                    else:
                        moved = plain['value'] + 0.5 * step * (other['value'] - plain['value'])
                        self.assertAlmostEqual(found['value'], moved,
                                               delta=found['uncertainty'] + plain['uncertainty'])

    def test_teeth_that_touch_at_a_corner(self):
        # A chequerboard maps onto itself when it is moved by half a pitch both ways: its bands come in pairs at the
        # zone edge, so its stop band has no width. Its corners are the most singular there are.
        squares = [tooth(200, 200, (-100, -100)), tooth(200, 200, (100, 100))]
        for polarization in ('ey', 'hy'):
            board = guide(polarization, 400, squares, 'periodic', lateral_span_nm=400)
            [values] = bands_at(board, [(1, 0)], 2)
            self.assertAlmostEqual(values[0]['value'], values[1]['value'], delta=1e-9)
            [fine] = bands_at(board, [(1, 0)], 2, '--accuracy', '1e-6')
            self.honest(values[0], fine[0])
            pair = guide(polarization, 400, [tooth(150, 150, (-75, -75)), tooth(150, 150, (75, 75))])
            mirrored = guide(polarization, 400, [tooth(150, 150, (75, -75)), tooth(150, 150, (-75, 75))])
            self.same(edges(pair), edges(mirrored), 1e-9)


class Extremes(Hard):
    """Very narrow, very wide, very thin: the coarse answer within its bar of a finer one."""

    def compare(self, shapes, pitch, fine, polarizations=('ey', 'hy'), **light):
        for polarization in polarizations:
            with self.subTest(polarization, shapes=shapes):
                problem = guide(polarization, pitch, shapes, **light)
                self.honest(bloch_index(problem, '--accuracy', '1e-3'), bloch_index(problem, '--accuracy', fine))

    def test_a_gap_of_20_nm(self):
        self.compare([tooth(280, 220)], 300, '1e-5')

    def test_a_tooth_of_1_nm(self):
        # In a bridge, which keeps the light in: a tenth of a per cent of the cell.
        self.compare([tooth(300, 400, fill='nitride'), tooth(1, 400)], 300, '1e-5')

    def test_a_thin_film(self):
        for thickness in (2, 0.1):
            film = {'stripe': {'fill': 'nitride', 'across': 'x', 'from_nm': 110, 'to_nm': 110 + thickness}}
            self.compare([film, tooth(120, 220)], 240, '1e-5')

    def test_a_pitch_of_40_nm_is_a_uniform_guide(self):
        # Far below the wavelength the cell is homogenised, to second order in pitch over wavelength (1e-3 here).
        for polarization in ('ey', 'hy'):
            point = run('index', guide(polarization, 40, [tooth(20, 220)]))['results'][0]['points'][0]
            self.assertAlmostEqual(point['modes'][0]['bloch_index']['value'], point['estimate'], delta=5e-3)
        self.compare([tooth(20, 220)], 40, '1e-5')

    def test_a_high_aspect(self):
        self.compare([tooth(20, 2000)], 200, '1e-5', polarizations=('ey',))

    def test_a_cell_of_10_um(self):
        # Walls 10 µm apart and a tooth that nearly reaches them: a stack of 20 and 280 nm films, but for its ends.
        layers = guide('ey', 300, [{'stripe': {'fill': 'silicon', 'across': 'z', 'from_nm': -75, 'to_nm': 75}}],
                       'uniform')
        for polarization in ('ey', 'hy'):
            layers['light'] = {'polarization': polarization}
            [stack] = bands_at(layers, [(1, 0)], 1)
            wide = guide(polarization, 300, [tooth(150, 9000)], 'magnetic' if polarization == 'ey' else 'electric',
                         lateral_span_nm=10000)
            [found] = bands_at(wide, [(1, 0)], 1)
            # The lowest wave is that of the stack with half a wave across: k_x = π/9 µm adds to the frequency.
            self.assertGreater(found[0]['value'], stack[0]['value'])
            self.assertLess(found[0]['value'], math.hypot(stack[0]['value'], 0.3 / (2 * 1.444 * 9)))
            self.assertLess(found[0]['uncertainty'], 1e-4 * found[0]['value'])


class Declined(unittest.TestCase):
    def test_oblique_and_curved_hy_corners_have_no_bar(self):
        trapezium = {'polygon': {'fill': 'silicon', 'corners_nm': [[-75, -225], [75, -225], [60, 225], [-60, 225]]}}
        for quantity in edges(guide('hy', 300, [trapezium])):
            self.assertGreater(quantity['value'], 0)
            self.assertIsNone(quantity['uncertainty'])
            self.assertIn('oblique', quantity['note'])
        for quantity in edges(guide('ey', 300, [trapezium])):
            self.assertGreater(quantity['uncertainty'], 0)


if __name__ == '__main__':
    unittest.main()
