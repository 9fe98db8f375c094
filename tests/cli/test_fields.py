"""index --fields: the file read by h5py, and what is in it against Maxwell's equations."""

import subprocess
import sys
import unittest

import h5py
import numpy as np

import tool

Z0 = 376.730313668  # ohm
UNITS = {'E': 'V/m', 'H': 'A/m'}
HELD = {'ey': ['Ey', 'Hx', 'Hz'], 'hy': ['Ex', 'Ez', 'Hy']}

ROW = tool.MATERIALS.format(name='row') + '''light: {wavelength_nm: [1500, 1550.5], polarization: both}
cell: {pitch_nm: 200, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 100, width_nm: 220, at_nm: [0, 0]}}]}
'''
# Radiates: 2π/pitch - k lies below the light line of the oxide.
LEAKY = (ROW.replace('pitch_nm: 200', 'pitch_nm: 640').replace('length_nm: 100', 'length_nm: 320')
         .replace('[1500, 1550.5], polarization: both', '1550, polarization: ey'))


class Mode:
    """A mode of a file with its fields as they are, in SI units."""

    def __init__(self, group):
        self.about = dict(group.attrs)
        self.z, self.x = group['z_um'][:] * 1e-6, group['x_um'][:] * 1e-6
        self.k0 = 2e9 * np.pi / self.about['wavelength_nm']
        self.permittivity = group['permittivity'][:]
        wave = np.exp(1j * self.about['k_per_um'] * 1e6 * self.z)[:, None]
        self.periodic = {name: group[name][:] for name in HELD[self.about['polarization']]}
        self.field = {name: values * wave for name, values in self.periodic.items()}

    def power(self):
        """W per metre of height through each plane z = constant: half of Re (E × H*)_z with
        (E × H*)_z = E_x H_y* - E_y H_x*."""
        zero = np.zeros_like(self.permittivity)
        f = {name: self.field.get(name, zero) for name in ('Ex', 'Ey', 'Hx', 'Hy')}
        density = np.real(f['Ex'] * np.conj(f['Hy']) - f['Ey'] * np.conj(f['Hx'])) / 2
        low, high = self.about['reliable_x_um'] * 1e-6
        inside = (self.x > low - 1e-12) & (self.x < high + 1e-12)
        return np.trapz(density[:, inside], self.x[inside], axis=1)

    def mean_power(self):
        return np.trapz(self.power(), self.z) / (self.z[-1] - self.z[0])

    def away(self, distance):
        """Nodes of one medium with everything within the distance (m) of them; the derivative along z
        needs neighbours on both sides."""
        same = np.ones(self.permittivity.shape, bool)
        for axis, lines in ((0, self.z), (1, self.x)):
            change = np.nonzero(np.any(np.abs(np.diff(self.permittivity, axis=axis)) > 1e-9, axis=1 - axis))[0]
            for i in change:
                near = (lines > lines[i] - distance) & (lines < lines[i + 1] + distance)
                same &= ~(near[:, None] if axis == 0 else near[None, :])
        same[[0, -1], :] = same[:, [0, -1]] = False
        low, high = self.about['reliable_x_um'] * 1e-6
        return same & ((self.x > low) & (self.x < high))[None, :]


def misfit(left, right, where=...):
    """Largest difference as a part of the largest value."""
    return np.abs(left - right)[where].max() / np.abs(left)[where].max()


def curls(mode):
    """Pairs of both sides of Maxwell's equations with fields as exp(-iωt); (z, x, y) right-handed:
    (∇×F)_x = -∂z F_y, (∇×F)_z = ∂x F_y, (∇×F)_y = ∂z F_x - ∂x F_z."""
    def slope(values, axis):
        return np.gradient(values, mode.z if axis == 'z' else mode.x, axis=0 if axis == 'z' else 1)
    f, electric, magnetic = mode.field, -1j * mode.k0 * mode.permittivity / Z0, 1j * mode.k0 * Z0
    if mode.about['polarization'] == 'ey':
        return [(-slope(f['Ey'], 'z'), magnetic * f['Hx']), (slope(f['Ey'], 'x'), magnetic * f['Hz']),
                (slope(f['Hx'], 'z') - slope(f['Hz'], 'x'), electric * f['Ey'])]
    return [(-slope(f['Hy'], 'z'), electric * f['Ex']), (slope(f['Hy'], 'x'), electric * f['Ez']),
            (slope(f['Ex'], 'z') - slope(f['Ez'], 'x'), magnetic * f['Hy'])]


class Fields(tool.ToolTest):
    def fields(self, text, *options, name='fields.h5', status=0):
        self.run_tool('index', '--fields', name, '--quiet', *options, self.write(text), status=status)
        file = h5py.File(self.folder / name, 'r')
        self.addCleanup(file.close)
        return file

    def test_the_file_explains_itself(self):
        file = self.fields(ROW, '--accuracy=1e-2')
        for word in ('description', 'conventions', 'name', 'picket_version'):
            self.assertIsInstance(file.attrs[word], str)
        self.assertEqual(file.attrs['name'], 'row')
        self.assertIn(file.attrs['picket_version'], self.run_tool('--version').stdout)
        self.assertEqual(list(file), ['ey', 'hy'])
        for polarization, wavelengths in file.items():
            self.assertEqual(list(wavelengths), ['1500nm', '1550.5nm'])
            for name, point in wavelengths.items():
                self.assertEqual(list(point), ['mode0'])
                mode = point['mode0']
                about = mode.attrs
                self.assertEqual(about['polarization'], polarization)
                self.assertEqual(about['wavelength_nm'], float(name[:-2]))
                self.assertEqual((about['order'], about['pitch_um']), (0, 0.2))
                self.assertAlmostEqual(about['k_per_um'], 2e3 * np.pi / about['wavelength_nm'] * about['bloch_index'], 12)
                self.assertIn('1 W per metre', about['normalisation'])
                self.assertEqual(sorted(mode), sorted(HELD[polarization] + ['permittivity', 'x_um', 'z_um']))
                shape = (len(mode['z_um']), len(mode['x_um']))
                for field in HELD[polarization] + ['permittivity']:
                    self.assertEqual((mode[field].shape, mode[field].dtype), (shape, np.complex128))
                    self.assertEqual(mode[field].attrs['unit'], UNITS.get(field[0], '1'))
                self.assertEqual(mode['x_um'].attrs['unit'], 'um')

    def test_indices_agree_with_the_answer(self):
        path = self.write(ROW)
        done = self.run_tool('index', '--fields', 'f.h5', '--json', '--set', 'light.wavelength_nm=1550', path)
        with h5py.File(self.folder / 'f.h5') as file:
            for answer in tool.document(done.stdout, 'index')['results']:
                index = file[answer['polarization']]['1550nm/mode0'].attrs['bloch_index']
                expected = answer['points'][0]['modes'][0]['bloch_index']['value']
                # One grid of 32 steps, no extrapolation: 1e-3 (ey) to 1e-4 (hy, measured).
                self.assertAlmostEqual(index.real / expected, 1, delta=2e-3)
                self.assertAlmostEqual(index.imag, 0, delta=1e-9)

    def test_power_is_one_watt_per_metre(self):
        """The rule and the fields at nodes are second order; at corners E is singular, so only a factor
        of two per halving is asked for."""
        for text in (ROW, LEAKY):
            errors = []
            for accuracy in ('1e-2', '1e-4'):
                file = self.fields(text, '--set', 'light.wavelength_nm=1550', f'--accuracy={accuracy}',
                                   name=f'{len(errors)}{len(text)}.h5')
                modes = [Mode(file[word]['1550nm/mode0']) for word in file]
                errors.append([abs(mode.mean_power() - 1) for mode in modes])
                if text == ROW:  # nothing is lost between one plane and the next
                    self.assertLess(max(np.ptp(mode.power()) for mode in modes), 0.05)
            for coarse, fine in zip(*errors):
                self.assertLess(coarse, 0.05)
                self.assertLess(fine, max(coarse / 2, 1e-4))

    def test_maxwells_equations(self):
        """Central differences of what was interpolated from differences: second order, so a quarter for
        half the spacing, away from interfaces and corners; 2.5 times less is asked for. Along x the
        formula of the fields is that of np.gradient, and only rounding is left."""
        worst = []
        for accuracy in ('1e-4', '1e-5'):
            file = self.fields(ROW, '--set', 'light.wavelength_nm=1550', f'--accuracy={accuracy}',
                               name=f'{accuracy}.h5')
            worst.append([misfit(left, right, mode.away(30e-9)) for word in ('ey', 'hy')
                          for mode in [Mode(file[word]['1550nm/mode0'])] for left, right in curls(mode)])
        for coarse, fine in zip(*worst):
            self.assertLess(coarse, 0.01)
            self.assertLess(fine, max(coarse / 2.5, 1e-12))

    def test_one_pitch_of_a_symmetric_cell(self):
        file = self.fields(ROW, '--accuracy=1e-3')
        for word, point in (('ey', '1500nm'), ('hy', '1550.5nm')):
            mode = Mode(file[word][point]['mode0'])
            np.testing.assert_allclose([mode.z[0], mode.z[-1]], [-100e-9, 100e-9], atol=1e-16)
            for name, values in mode.periodic.items():
                np.testing.assert_array_equal(values[0], values[-1])
                sign = -1 if name.endswith('z') else 1
                self.assertLess(misfit(values, sign * values[:, ::-1]), 1e-7)
            main = mode.periodic[word.capitalize()]
            largest = main.flat[np.abs(main).argmax()]
            self.assertLess(abs(largest.imag), 1e-5 * largest.real)
            inside = (np.abs(mode.z) < 49e-9)[:, None] & (np.abs(mode.x) < 109e-9)[None, :]
            outside = (np.abs(mode.z) > 51e-9)[:, None] | (np.abs(mode.x) > 111e-9)[None, :]
            np.testing.assert_allclose(mode.permittivity[inside], 3.476**2, rtol=1e-12)
            np.testing.assert_allclose(mode.permittivity[outside], 1.444**2, rtol=1e-12)

    def test_inside_a_stop_band(self):
        file = self.fields(tool.stack(), '--set', 'light.wavelength_nm=1000', '--accuracy=1e-3')
        mode = Mode(file['ey/1000nm/mode0'])
        self.assertIn('does not propagate', mode.about['normalisation'])
        self.assertAlmostEqual(max(np.abs(values).max() for values in mode.periodic.values()), 1, 12)
        self.assertAlmostEqual(mode.about['bloch_index'].real, 2.5, 9)
        self.assertGreater(mode.about['bloch_index'].imag, 0.01)
        self.assertEqual(mode.x.tolist(), [0])

    def test_a_wavelength_without_a_mode(self):
        """Silicon of the catalogue is not known at 200 nm."""
        text = tool.stack().replace('fill: core', 'fill: silicon')
        file = self.fields(text, '--set', 'light.wavelength_nm=[200, 1550]', '--accuracy=1e-3', status=1)
        self.assertEqual(list(file['ey/200nm']), [])
        self.assertIn('200', file['ey/200nm'].attrs['note'])
        self.assertEqual(list(file['ey/1550nm']), ['mode0'])

    def test_what_is_refused(self):
        path = self.write(tool.stack())
        self.assert_refused('edges', '--fields', 'a.h5', path, says=['--fields', 'picket index', 'picket edges'])
        self.assert_refused('index', '--fields', '-', path, says=['--fields', 'name of a file'])
        self.assert_refused('index', '--fields', 'no/folder/a.h5', path, status=3,
                            says=['no/folder/a.h5 cannot be written', 'No such file'])
        self.assert_refused('index', '--fields', '.', path, status=3, says=['not a plain file'])
        self.assertEqual([p.name for p in self.folder.iterdir()], ['problem.yaml'])

    def test_the_example(self):
        self.fields(ROW, '--accuracy=1e-2', '--count=2').close()
        done = subprocess.run([sys.executable, str(tool.SOURCE / 'examples' / 'read_fields.py'), 'fields.h5'],
                              cwd=self.folder, capture_output=True, text=True, check=False)
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertRegex(done.stdout, r'/hy/1550\.5nm/mode0: Bloch index 1\.59\d+.*largest \|Hy\| .* A/m\n')


if __name__ == '__main__':
    unittest.main()
