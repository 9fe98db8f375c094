"""Group index and dispersion against differences of the Bloch index over frequency."""
import unittest

from drive import row, table
from index_answers import differences, mode_of
from test_index_rows import segmented

REFERENCE = table('index')


class Slopes(unittest.TestCase):
    def check_slopes(self, problem, wavelength, part, *options, group_part, dispersion_part):
        mode = mode_of(problem, *options, wavelength_nm=wavelength)
        group, dispersion = differences(problem, wavelength, part, *options)
        value = mode['group_index']['value']
        self.assertAlmostEqual(value, group, delta=group_part * value)
        value = mode['dispersion_ps_per_nm_km']['value']
        self.assertAlmostEqual(value, dispersion, delta=dispersion_part * abs(value))

    def closed(self, polarization):
        """Walls far off: the grid is the same at all wavelengths, and so is what it errs by."""
        return {'format': 1, 'light': {'polarization': polarization},
                'materials': {'silicon': {'catalogue': 'silicon'}, 'oxide': {'catalogue': 'silica'}},
                'cell': {'pitch_nm': 200, 'cladding': 'oxide', 'lateral': 'electric', 'lateral_span_nm': 1500,
                         'shapes': [{'rect': {'fill': 'silicon', 'length_nm': 100, 'width_nm': 220}}]}}

    def test_between_walls_with_dispersion(self):
        # The derivative is that of the discrete problem, extrapolated by the same rule: it agrees to rounding, which
        # a difference over 1 % raises to 1e-9, and to the fifth derivative times 1e-8.
        for polarization in ('ey', 'hy'):
            for wavelength in (1500, 1600):
                with self.subTest(polarization=polarization, wavelength=wavelength):
                    self.check_shared_grid(polarization, wavelength)

    def check_shared_grid(self, polarization, wavelength):
        self.check_slopes(self.closed(polarization), wavelength, 5e-3, '--accuracy=1e-4', group_part=1e-7,
                          dispersion_part=1e-5)

    def test_open_cells(self):
        # The grid follows the wavelength, so that indices err by up to 1e-8, differences over 3 % by 1e-6.
        for case in REFERENCE['segmented'][::3] + [{'pitch': 300, 'duty': 0.5, 'polarization': 'hy'}]:
            for wavelength in (1550, 1620):
                with self.subTest(**case, wavelength=wavelength):
                    self.check_slopes(segmented(case), wavelength, 1e-2, '--accuracy=1e-6', group_part=2e-6,
                                      dispersion_part=1e-4)

    def test_open_cell_with_dispersion(self):
        problem = row(200, 100, 220, 'hy')
        problem['materials'] = {'tooth': {'catalogue': 'silicon'}, 'around': {'catalogue': 'silica'}}
        self.check_slopes(problem, 1550, 1e-2, '--accuracy=1e-6', group_part=2e-6, dispersion_part=1e-4)


if __name__ == '__main__':
    unittest.main()
