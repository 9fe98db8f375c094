"""What must not change an answer: scale, place in the cell, mirror images, a doubled cell, swapped axes.

Numbers that two grids should share to rounding agree to 1e-9; where the grid differs, they agree within the sum of
the bars."""
import copy
import math
import unittest

from drive import bands_at, constant, disc, first_band, lattice, rect, row

QUANTITIES = ('long_nm', 'short_nm', 'attenuation_db_per_pitch')
ROUNDING = 1e-9
COARSE = ('--accuracy', '1e-3')


def scaled(value, factor):
    """A problem's cell with every length multiplied."""
    if isinstance(value, dict):
        return {key: ([factor * x for x in v] if isinstance(v, list) else factor * v)
                if key.endswith('_nm') else scaled(v, factor) for key, v in value.items()}
    return [scaled(v, factor) for v in value] if isinstance(value, list) else value


def moved(problem, shift):
    """The shapes moved along z; a centre that leaves the cell comes in at the other end, and shapes wrap."""
    result = copy.deepcopy(problem)
    pitch = result['cell']['pitch_nm']
    for shape in result['cell']['shapes']:
        [body] = shape.values()
        at = body.get('at_nm', [0, 0])
        body['at_nm'] = [(at[0] + shift + pitch / 2) % pitch - pitch / 2, at[1]]
    return result


def lopsided(polarization):
    """A cell without any mirror plane: a tooth and a smaller one that touches its side."""
    problem = row(310, 150, 420, polarization, tooth=2.9, around=1.444)
    problem['materials']['third'] = constant(2.1)
    problem['cell']['shapes'].append(rect(40, 150, at=(95, 60), fill='third'))
    return problem


class Edges(unittest.TestCase):
    def same(self, a, b, name, factor=1.0, rounding=None):
        for quantity in QUANTITIES:
            ratio = factor if quantity.endswith('_nm') else 1
            off = abs(ratio * a[quantity]['value'] - b[quantity]['value'])
            allowed = (rounding * b[quantity]['value'] if rounding
                       else ratio * a[quantity]['uncertainty'] + b[quantity]['uncertainty'])
            self.assertLessEqual(off, allowed, f'{name}, {quantity}: off by {off / b[quantity]["value"]:.1e}')

    def test_scale(self):
        # Constant materials: every length times 1.7 multiplies the edges by 1.7 and leaves the decay per pitch.
        for polarization in ('ey', 'hy'):
            problem = lopsided(polarization)
            larger = {**problem, 'cell': scaled(problem['cell'], 1.7)}
            self.same(first_band(problem, *COARSE), first_band(larger, *COARSE), polarization, factor=1.7, rounding=1e-8)

    def test_place_along_the_guide(self):
        for polarization in ('ey', 'hy'):
            problem = lopsided(polarization)
            first = first_band(problem, *COARSE)
            for shift in (77.5, -131) if polarization == 'ey' else (-131,):
                self.same(first, first_band(moved(problem, shift), *COARSE), f'{polarization} moved by {shift}')

    def test_a_tooth_across_the_boundary(self):
        # Half a pitch away the tooth lies across the periodic boundary: the same grid turned round.
        for polarization in ('ey', 'hy'):
            problem = row(310, 150, 420, polarization, tooth=2.9)
            self.same(first_band(problem, *COARSE), first_band(moved(problem, 155), *COARSE), polarization)

    def test_mirror_images(self):
        for polarization in ('ey', 'hy'):
            problem = lopsided(polarization)
            first = first_band(problem, *COARSE)
            for flip_z, flip_x in ((-1, 1), (1, -1)):
                image = copy.deepcopy(problem)
                at = image['cell']['shapes'][-1]['rect']['at_nm']
                image['cell']['shapes'][-1]['rect']['at_nm'] = [flip_z * at[0], flip_x * at[1]]
                self.same(first, first_band(image, *COARSE), f'{polarization} mirrored {flip_z} {flip_x}')

    def test_a_rectangle_is_a_polygon(self):
        for polarization in ('ey', 'hy'):
            problem = row(310, 150, 420, polarization, tooth=2.9)
            polygon = copy.deepcopy(problem)
            polygon['cell']['shapes'] = [{'polygon': {'fill': 'tooth', 'corners_nm': [
                [-75, -210], [75, -210], [75, 210], [-75, 210]]}}]
            self.same(first_band(problem, *COARSE), first_band(polygon, *COARSE), polarization, rounding=ROUNDING)

    def test_paint_order_matters_only_where_shapes_overlap(self):
        apart = lopsided('ey')  # its shapes touch and do not overlap
        turned = copy.deepcopy(apart)
        turned['cell']['shapes'].reverse()
        self.same(first_band(apart, *COARSE), first_band(turned, *COARSE), 'order of shapes', rounding=ROUNDING)


class Bands(unittest.TestCase):
    def same(self, first, second, name, factor=1.0):
        self.assertEqual(len(first), len(second))
        for number, (a, b) in enumerate(zip(first, second)):
            off = abs(factor * a['value'] - b['value'])
            self.assertLessEqual(off, factor * a['uncertainty'] + b['uncertainty'] + 1e-12, f'{name}, band {number + 1}')

    def test_a_doubled_cell_folds_the_bands(self):
        # Two pitches in one cell: k and k + 2π/pitch meet, frequencies count the longer pitch.
        for polarization in ('ey', 'hy'):
            single = lattice([rect(130, 240)], 8, 2, polarization, pitch=300, span=500)
            double = lattice([rect(130, 240, at=(-150, 0)), rect(130, 240, at=(150, 0))], 8, 2, polarization, pitch=600,
                             span=500)
            for kz, kx in ((0.3, 0.0), (0.25, 0.6)):
                near, far = bands_at(single, [(kz, kx), (kz + 1, kx)], 3, *COARSE)
                union = sorted(near + far, key=lambda q: q['value'])[:3]
                [folded] = bands_at(double, [(2 * kz, kx)], 3, *COARSE)
                self.same(union, folded, f'{polarization} at {kz}', factor=2)

    def test_swapped_axes(self):
        # The cell turned by a quarter: z and x change places; frequencies count the other side.
        for polarization in ('ey', 'hy'):
            upright = lattice([rect(130, 240)], 8, 2, polarization, pitch=300, span=500)
            turned = lattice([rect(240, 130)], 8, 2, polarization, pitch=500, span=300)
            [first] = bands_at(upright, [(0.35, 0.8)], 3, *COARSE)
            [second] = bands_at(turned, [(0.8, 0.35)], 3, *COARSE)
            self.same(first, second, polarization, factor=500 / 300)

    def test_wavenumbers_of_the_same_wave(self):
        # k, -k, k + 2π/pitch, and a sign of k_x in a cell with a lateral mirror plane.
        problem = lattice([rect(130, 240)], 8, 2, 'hy', pitch=300, span=500)
        first, *others = bands_at(problem, [(0.35, 0.8), (-0.35, 0.8), (2.35, 0.8), (0.35, -0.8), (0.35, 2.8)], 3,
                                  *COARSE)
        for other in others:
            for a, b in zip(first, other):
                self.assertAlmostEqual(a['value'], b['value'], delta=ROUNDING)

    def test_a_square_lattice_told_as_rhombic(self):
        # Turned by 45 degrees: rows at half the diagonal, each advanced by half of it. The wavenumber turns along.
        diagonal = 500 * math.sqrt(2)
        square = lattice([disc(200)], 9, 1, 'ey', pitch=500, span=500)
        rhombic = lattice([disc(200)], 9, 1, 'ey', pitch=diagonal, span=diagonal / 2, lateral_shift=0.5)
        kz, kx = 0.4, 0.2
        [first] = bands_at(square, [(kz, kx)], 2, *COARSE)
        [second] = bands_at(rhombic, [(kz + kx, (kx - kz) / 2)], 2, *COARSE)
        self.same(first, second, 'turned by 45 degrees', factor=math.sqrt(2))


class Boundaries(unittest.TestCase):
    """Shapes that touch the cell's ends are sound input."""

    SLAB = {'ey': 2.8477822434, 'hy': 2.0533196788}  # 220 nm of 3.476 in 1.444 at 1550 nm, transfer matrix (F)

    def test_a_tooth_as_long_as_the_pitch_is_a_solid_guide(self):
        for polarization, index in self.SLAB.items():
            for pitch in (200, 260):
                k = 2 * index * pitch / 1550
                self.assertLess(k, 1)
                [[lowest]] = bands_at(row(pitch, pitch, 220, polarization), [(k, 0)], 1, '--accuracy', '1e-6')
                self.assertAlmostEqual(lowest['value'] * 1550 / pitch, 1, delta=1e-6)
                self.assertLessEqual(abs(lowest['value'] - pitch / 1550), lowest['uncertainty'])

    def test_two_halves_that_touch_are_one_tooth(self):
        for polarization in ('ey', 'hy'):
            whole = row(310, 150, 420, polarization, tooth=2.9)
            halves = copy.deepcopy(whole)
            halves['cell']['shapes'] = [rect(80, 420, at=(-35, 0), fill='tooth'), rect(70, 420, at=(40, 0), fill='tooth')]
            a, b = first_band(whole, *COARSE), first_band(halves, *COARSE)
            for quantity in QUANTITIES:
                self.assertLessEqual(abs(a[quantity]['value'] - b[quantity]['value']),
                                     a[quantity]['uncertainty'] + b[quantity]['uncertainty'])

    def test_a_rectangle_from_wall_to_wall(self):
        # Lattice veins told as a rectangle that touches both lateral boundaries, and as a stripe.
        for polarization in ('ey', 'hy'):
            touching = lattice([rect(120, 500)], 8, 2, polarization, pitch=300, span=500)
            stripe = lattice([{'stripe': {'fill': 'shape', 'across': 'z', 'from_nm': -60, 'to_nm': 60}}], 8, 2,
                             polarization, pitch=300, span=500)
            first, second = (bands_at(p, [(0.4, 0.3)], 3, '--accuracy', '1e-4')[0] for p in (touching, stripe))
            for a, b in zip(first, second):
                self.assertAlmostEqual(a['value'], b['value'], delta=ROUNDING)


if __name__ == '__main__':
    unittest.main()
