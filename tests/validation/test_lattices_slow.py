"""Two-dimensional lattices against cylindrical waves and against the textbook's gaps."""
import math
import unittest

import numpy as np

from drive import bands_at, check, disc, lattice, rect, run, table
from rod_lattice import band_near

REFERENCE = table('lattices')


class SquareRods(unittest.TestCase):
    def check_polarization(self, polarization, accuracy):
        case = REFERENCE['square_rods']
        problem = lattice([disc(2000 * case['radius'])], case['permittivity'], 1, polarization)
        rows = case[polarization]
        found = bands_at(problem, [[k / math.pi for k in r['k']] for r in rows], 4, '--accuracy', accuracy)
        for wanted, bands in zip(rows, found):
            if wanted['first'] == 2:
                self.assertEqual(bands[0]['value'], 0)
            for at, frequency in enumerate(wanted['frequencies'], start=wanted['first'] - 1):
                check(self, f'{polarization} {wanted["k"]} band {at + 1}', bands[at], frequency,
                      REFERENCE['square_rods']['tolerance'][polarization])

    def test_ey(self):
        self.check_polarization('ey', '4e-5')

    def test_hy(self):
        self.check_polarization('hy', '1e-3')


class OtherRods(unittest.TestCase):
    """Radii and contrasts beyond the table, against the same method written out in rod_lattice.py."""

    def test_the_method_gives_the_table(self):
        case = REFERENCE['square_rods']
        for polarization in ('ey', 'hy'):
            for row in case[polarization][1::2]:
                frequency = row['frequencies'][1]
                found = band_near(1.0001 * frequency, row['k'], case['radius'], case['permittivity'], 1, polarization,
                                  width=5e-4)
                self.assertAlmostEqual(found, frequency, delta=1e-7)

    def test_a_triangular_lattice(self):
        zone_corner, radius, rows = (4 / 3, 0), 0.2, 1000 * math.sqrt(0.75)
        for polarization in ('ey', 'hy'):
            problem = lattice([disc(2000 * radius)], 12, 1, polarization, span=rows, lateral_shift=0.5)
            [[lowest]] = bands_at(problem, [zone_corner], 1, '--accuracy', '1e-3')
            exact = band_near(lowest['value'], (math.pi * 4 / 3, 0), radius, 12, 1, polarization, triangular=True)
            check(self, polarization, lowest, exact, 1e-3)

    def test_rods_and_holes(self):
        for inside, outside, radius in ((12.08, 2.085, 0.22), (1, 12, 0.3)):
            for polarization in ('ey', 'hy'):
                problem = lattice([disc(2000 * radius, at=(130, -70))], inside, outside, polarization)
                [bands] = bands_at(problem, [(0.9 / math.pi, 0.4 / math.pi)], 3, '--accuracy', '3e-3')
                for number, found in enumerate(bands):
                    name = f'{inside}:{outside} {polarization} band {number + 1}'
                    width = 1.001 * found['uncertainty'] / found['value']
                    exact = band_near(found['value'], (0.9, 0.4), radius, inside, outside, polarization, width=width,
                                      steps=13)
                    self.assertIsNotNone(exact, name)
                    check(self, name, found, exact, 3e-3)


def veins_by_plane_waves(permittivity, width, k, orders):
    """The two lowest frequencies of H along y at k, in 2π/pitch: (k+G) η (k'+G') with the product rules of Li: across
    an interface the inverse of the transform of 1/ε, along it the transform of ε."""
    hole = 1 - width
    order = np.arange(-orders, orders + 1)
    apart = order[:, None] - order[None, :]
    strip = np.where(apart == 0, hole, np.sin(np.pi * apart * hole) / (np.pi * np.where(apart == 0, 1, apart)))
    one = np.eye(len(order))
    across = np.linalg.inv(strip + (one - strip) / permittivity)
    e_z = np.linalg.inv(np.kron(across, strip) + permittivity * np.kron(one, one - strip))
    e_x = np.linalg.inv(np.kron(strip, across) + permittivity * np.kron(one - strip, one))
    k_z = np.kron(order + k[0], np.ones(len(order)))
    k_x = np.kron(np.ones(len(order)), order + k[1])
    matrix = k_x[:, None] * e_z * k_x[None, :] + k_z[:, None] * e_x * k_z[None, :]
    return np.sqrt(np.linalg.eigvalsh(0.5 * (matrix + matrix.T))[:2])


class Gaps(unittest.TestCase):
    def gap(self, case, problem, corners, below):
        answer = run('bands', {**problem, 'path': [{'at': k} for k in corners]}, '--points', '1', '--count',
                     str(below + 1), '--accuracy', '1e-3')
        [gap] = [g for g in answer['results'][0]['gaps'] if g['below'] == below]
        return gap['from'], gap['to']

    def test_edges_and_widths(self):
        pitch, rows = 1000, 1000 * math.sqrt(0.75)
        for case in REFERENCE['gaps']:
            with self.subTest(case['name'], polarization=case['polarization']):
                shapes, cell, corners, below = [disc(2 * pitch * case['disc_radius'])], {}, case['corners'], case['below']
                if case.get('triangular') == 'doubled':
                    shapes.append(disc(2 * pitch * case['disc_radius'], at=(pitch / 2, rows)))
                    cell, corners, below = {'span': 2 * rows}, [[z, 2 * x] for z, x in corners], 2 * below
                elif case.get('triangular'):
                    cell = {'span': rows, 'lateral_shift': 0.5}
                problem = lattice(shapes, *case['permittivity'], case['polarization'], pitch, **cell)
                low, high = self.gap(case, problem, corners, below)
                tolerance = case.get('tolerance', REFERENCE['tolerance'][case['polarization']])
                check(self, 'from', low, case['from'], tolerance, digits=REFERENCE['digits']['edge'])
                check(self, 'to', high, case['to'], tolerance, digits=REFERENCE['digits']['edge'])
                if 'percent' in case:
                    percent = 200 * (high['value'] - low['value']) / (high['value'] + low['value'])
                    self.assertAlmostEqual(percent, case['percent'], delta=REFERENCE['digits']['percent'])

    def test_veins(self):
        case = REFERENCE['veins']
        hole = 1000 * (1 - case['width'])
        problem = lattice([rect(hole, hole)], 1, case['permittivity'], 'hy')
        low, high = self.gap(case, problem, [[0, 0], [1, 0], [1, 1]], 1)
        exact_low = veins_by_plane_waves(case['permittivity'], case['width'], (0.5, 0.5), 12)[0]
        exact_high = veins_by_plane_waves(case['permittivity'], case['width'], (0.5, 0), 12)[1]
        self.assertAlmostEqual(low['value'], exact_low, delta=case['plane_wave_tolerance'] * exact_low)
        self.assertAlmostEqual(high['value'], exact_high, delta=case['plane_wave_tolerance'] * exact_high)
        percent = 200 * (high['value'] - low['value']) / (high['value'] + low['value'])
        self.assertAlmostEqual(percent, case['textbook_percent'], delta=case['textbook_tolerance'])


if __name__ == '__main__':
    unittest.main()
