"""Sweeps: modes that cross keep their labels, and a run gives the same digits again."""
import json
import unittest

from drive import check, constant, rect, row, run, table
from index_answers import points_of, slab_index
from test_index_rows import USUAL, segmented

REFERENCE = table('index')
STRIPE, GAP = 1500, 1500  # nm


class Crossing(unittest.TestCase):
    """A row of segments beside a wide stripe, so far apart that they hardly meet: the row's index is known
    (index.yaml), the stripe's is that of a film. The row's falls faster with wavelength, and they cross."""

    def test_labels_stay_with_the_modes(self):
        reference, = (case for case in REFERENCE['rows'] if case['name'] == 'segmented, ey')
        known = {at['wavelength']: at['index'] for at in reference['at']}
        shape = reference['row']
        problem = row(**shape)
        problem['materials']['stripe'] = constant(2.14)
        problem['cell']['shapes'] = [
            rect(shape['length'], shape['width'], (0, -GAP - shape['width'] / 2), 'tooth'),
            {'stripe': {'fill': 'stripe', 'across': 'x', 'from_nm': 0, 'to_nm': STRIPE}}]
        wavelengths = [1310, 1380, 1420, 1480, 1550, 1680]
        points = points_of(problem, '--accuracy=1e-3', '--count=2', wavelength_nm=wavelengths)
        before = []
        for wavelength, point in zip(wavelengths, points):
            # The order at the longest wavelength is that of falling index: first the stripe.
            stripe, segments = point['modes']
            self.assertEqual((stripe['order'], segments['order']), (0, 1))
            film = slab_index([(1.444, 0), (2.14, STRIPE / 1000), (1.444, 0)], wavelength, 'ey', 2.08).real
            check(self, f'stripe at {wavelength}', stripe['bloch_index'], film, 2e-5, digits=1e-6)
            if wavelength in known:
                check(self, f'row at {wavelength}', segments['bloch_index'], known[wavelength], 2e-5, digits=1e-6)
            before.append(stripe['bloch_index']['value'] > segments['bloch_index']['value'])
        self.assertEqual((before[0], before[-1]), (False, True))  # they did cross


class Again(unittest.TestCase):
    def test_the_same_digits(self):
        case = {'pitch': 300, 'duty': 0.5, 'polarization': 'hy'}
        problem = segmented(case, wavelength_nm=[1050, 1300, 1550])
        first = run('index', problem, '--accuracy=1e-3', '--count=2', '--jobs=1')
        for jobs in ('--jobs=1', '--jobs=3'):
            again = run('index', problem, '--accuracy=1e-3', '--count=2', jobs)
            self.assertEqual(json.dumps(again), json.dumps(first))

    def test_a_point_is_the_same_alone_and_in_a_sweep(self):
        problem = segmented({'pitch': 200, 'duty': 0.5, 'polarization': 'ey'})
        sweep = points_of(problem, USUAL, wavelength_nm=[1500, 1550, 1600])
        self.assertEqual(points_of(problem, USUAL, wavelength_nm=1550), [sweep[1]])


if __name__ == '__main__':
    unittest.main()
