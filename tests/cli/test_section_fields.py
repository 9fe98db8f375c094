"""modes --fields: the file read by h5py, and what is in it against Maxwell's equations on the staggered
grid, closed forms and the C interface."""

import ctypes
import os
import subprocess
import sys
import unittest

import h5py
import numpy as np

import tool

Z0 = 376.730313668  # ohm
NAMES = ['Ex', 'Ey', 'Ez', 'Hx', 'Hy', 'Hz']
# (along x, along y), after K. S. Yee, IEEE Trans. Antennas Propag. 14, 302 (1966).
PLACES = {'Ex': ('middles', 'lines'), 'Ey': ('lines', 'middles'), 'Ez': ('lines', 'lines'),
          'Hx': ('lines', 'middles'), 'Hy': ('middles', 'lines'), 'Hz': ('middles', 'middles')}

WIRE = tool.MATERIALS.format(name='wire') + '''light: {wavelength_nm: 1550}
section:
  cladding: oxide
  shapes:
    - rect: {fill: core, width_nm: 450, height_nm: 220, at_nm: [0, 110]}
'''
# Light leaks into silicon below.
LEAKY = WIRE + '    - stripe: {fill: silicon, across: y, from_nm: -.inf, to_nm: -700}\n'
# A core of the surrounding glass behind a moat of air: light leaks on all sides.
MOAT = tool.MATERIALS.format(name='moat') + '''  glass: {constant: {index: 1.5}}
  air: {constant: {index: 1}}
light: {wavelength_nm: 1000}
section:
  cladding: glass
  shapes:
    - rect: {fill: air, width_nm: 2400, height_nm: 2000}
    - rect: {fill: glass, width_nm: 1400, height_nm: 1000}
'''
# One medium between electric walls.
BOX = tool.MATERIALS.format(name='metal box') + '''light: {wavelength_nm: 1000}
section:
  cladding: oxide
  span_nm: [1000, 600]
  shapes:
    - rect: {fill: oxide, width_nm: 500, height_nm: 300}
'''


class Mode:
    """A mode of a file."""

    def __init__(self, group):
        self.about = dict(group.attrs)
        self.places = {name: group[name][:] for name in ('x_lines_um', 'x_middles_um', 'y_lines_um', 'y_middles_um')}
        self.field = {name: group[name][:] for name in NAMES}
        self.permittivity = {axis: group[f'permittivity_{axis}'][:] for axis in ('xx', 'yy', 'zz')}
        self.axes = {name: group[name].attrs['axes'] for name in NAMES}
        self.units = {name: group[name].attrs['unit'] for name in NAMES}
        self.k = self.about['k_per_um']
        self.k0 = 2e3 * np.pi / self.about['wavelength_nm']
        self.dx, self.dy = np.diff(self.places['x_lines_um']), np.diff(self.places['y_lines_um'])
        self.wx, self.wy = (np.convolve(d, [0.5, 0.5]) for d in (self.dx, self.dy))

    def coordinates(self, name):
        return tuple(self.places[f'{axis}_{kind}_um'] for axis, kind in zip('xy', PLACES[name]))

    def power(self):
        """Half the real part of the integral of E_x H_y* - E_y H_x* over the reliable window, W."""
        def weight(places, lines, low, high, on_middles):
            edges = lines if on_middles else np.concatenate([lines[:1], (lines[1:] + lines[:-1]) / 2, lines[-1:]])
            assert len(edges) == len(places) + 1
            edges = np.clip(edges, low, high)
            return np.diff(edges)
        total = 0
        for electric, magnetic, sign in (('Ex', 'Hy', 1), ('Ey', 'Hx', -1)):
            weights = [weight(self.coordinates(electric)[i], self.places[f'{axis}_lines_um'],
                              *self.about[f'reliable_{axis}_um'], PLACES[electric][i] == 'middles')
                       for i, axis in enumerate('xy')]
            density = np.real(self.field[electric] * np.conj(self.field[magnetic]))
            total += sign * 0.5e-12 * np.einsum('ij,i,j', density, *weights)
        return total

    def flux(self):
        """εE of the three components."""
        return [self.permittivity[2 * axis] * self.field[f'E{axis}'] for axis in 'xyz']

    def laws(self):
        """Pairs that are equal by the equations of the scheme, and the size of what is in them: divergence,
        then curls. Lengths in µm."""
        f, (dx, dy, dz), ik = self.field, self.flux(), 1j * self.k
        wx, wy = self.wx[1:-1, None], self.wy[None, 1:-1]
        electric, magnetic = -1j * self.k0 / Z0, 1j * self.k0 * Z0
        large_d = max(np.abs(d).max() for d in (dx, dy, dz))
        large_e, large_d = self.k0 * max(np.abs(f[name]).max() for name in ('Ex', 'Ey', 'Ez')), self.k0 * large_d
        yield (np.diff(dx, axis=0)[:, 1:-1] / wx + np.diff(dy, axis=1)[1:-1] / wy, -ik * dz[1:-1, 1:-1], large_d)
        yield (np.diff(f['Ey'], axis=0) / self.dx[:, None] - np.diff(f['Ex'], axis=1) / self.dy, magnetic * f['Hz'],
               large_e)
        yield (np.diff(f['Hy'], axis=0)[:, 1:-1] / wx - np.diff(f['Hx'], axis=1)[1:-1] / wy,
               electric * dz[1:-1, 1:-1], large_d / Z0)
        yield (np.diff(f['Hz'], axis=1) / wy - ik * f['Hy'][:, 1:-1], electric * dx[:, 1:-1], large_d / Z0)
        yield (np.diff(f['Ez'], axis=1) / self.dy - ik * f['Ey'], magnetic * f['Hx'], large_e)
        yield (ik * f['Ex'] - np.diff(f['Ez'], axis=0) / self.dx[:, None], magnetic * f['Hy'], large_e)


def misfit(left, right):
    """Largest difference as a part of the largest value."""
    return np.abs(left - right).max() / np.abs(right).max()


class Fields(tool.ToolTest):
    def fields(self, text, *options, name='fields.h5', status=0):
        self.run_tool('modes', '--fields', name, '--quiet', '--accuracy=1e-2', *options, self.write(text), status=status)
        file = h5py.File(self.folder / name, 'r')
        self.addCleanup(file.close)
        return file

    def test_the_file_explains_itself(self):
        file = self.fields(WIRE, '--count=2')
        for word in ('description', 'conventions', 'name', 'picket_version'):
            self.assertIsInstance(file.attrs[word], str)
        self.assertEqual((file.attrs['name'], list(file), list(file['section'])), ('wire', ['section'], ['1550nm']))
        self.assertEqual(list(file['section/1550nm']), ['mode0', 'mode1'])
        for order in (0, 1):
            mode = Mode(file[f'section/1550nm/mode{order}'])
            self.assertEqual((mode.about['order'], mode.about['wavelength_nm']), (order, 1550))
            self.assertAlmostEqual(mode.k, mode.k0 * mode.about['index'], 12)
            self.assertIn('1 W', mode.about['normalisation'])
            for name in NAMES:
                self.assertEqual(mode.axes[name], 'x_{}_um, y_{}_um'.format(*PLACES[name]))
                self.assertEqual(mode.units[name], {'E': 'V/m', 'H': 'A/m'}[name[0]])
                self.assertEqual(mode.field[name].shape, tuple(map(len, mode.coordinates(name))))
                self.assertEqual(mode.field[name].dtype, np.complex128)

    def test_laws_and_power(self):
        """The equations of the scheme hold to the residual of the solver, 1e-9 of the largest term; a
        mirror plane that was unfolded with a wrong sign would break them by 1."""
        for text, modes in ((WIRE, 2), (BOX, 3)):
            file = self.fields(text, f'--count={modes}', name=f'{modes}.h5')
            points, = file['section'].values()
            self.assertEqual(len(points), modes)
            for group in points.values():
                mode = Mode(group)
                self.assertAlmostEqual(mode.power(), 1, delta=1e-12)
                for left, right, size in mode.laws():
                    self.assertLess(np.abs(left - right).max(), 1e-8 * size)
                largest = max((mode.field[name] for name in ('Ex', 'Ey')), key=lambda v: np.abs(v).max())
                value = largest.flat[np.abs(largest).argmax()]
                self.assertLess(abs(value.imag), 1e-9 * value.real)

    def test_symmetry_and_media(self):
        """The wire has a mirror plane across x: its te-like mode has E_x even. Nothing is lost."""
        mode = Mode(self.fields(WIRE, '--count=1')['section/1550nm/mode0'])
        np.testing.assert_allclose(mode.places['x_lines_um'], -mode.places['x_lines_um'][::-1], atol=1e-12)
        for name, sign in (('Ex', 1), ('Hy', 1), ('Hz', 1), ('Ey', -1), ('Ez', -1), ('Hx', -1)):
            self.assertLess(misfit(mode.field[name], sign * mode.field[name][::-1]), 1e-12)
        x, y = mode.coordinates('Ez')
        inside = ((np.abs(x) < 0.224)[:, None] & ((y > 1e-3) & (y < 0.219))[None, :])
        far = ((np.abs(x) > 0.4)[:, None] | ((y < -0.2) | (y > 0.4))[None, :])
        self.assertGreater(inside.sum(), 20)
        # Corners are corrected, so what touches one is left out of `far`.
        np.testing.assert_allclose(mode.permittivity['zz'][far], 1.444**2, rtol=1e-12)
        self.assertLess(mode.permittivity['zz'].real.max(), 3.476**2 * (1 + 1e-12))

    def test_what_jumps_and_what_does_not(self):
        """On the side wall E_x jumps by the ratio of the permittivities and εE_x does not; lines
        through the two middles of either side meet there, with an error of second order: 3 % here."""
        mode = Mode(self.fields(WIRE, '--count=1', '--accuracy=1e-4')['section/1550nm/mode0'])
        x, y = mode.coordinates('Ex')
        row, wall = np.abs(y - 0.110).argmin(), 0.225
        right = np.nonzero(x > wall)[0][:2]
        left = np.nonzero(x < wall)[0][-2:]
        at_wall = {}
        for side, places in (('core', left), ('oxide', right)):
            (a, b), values = x[places], mode.field['Ex'][places, row].real
            at_wall[side] = values[0] + (wall - a) * (values[1] - values[0]) / (b - a)
        ratio = at_wall['oxide'] / at_wall['core']
        self.assertAlmostEqual(ratio / (3.476 / 1.444)**2, 1, delta=0.06)

    def test_a_box_of_metal(self):
        """The first mode across 1000 nm is E_y = cos(πx/a), on the equal steps of a grid too."""
        mode = Mode(self.fields(BOX, '--count=1')['section/1000nm/mode0'])
        x, _ = mode.coordinates('Ey')
        largest = mode.field['Ey'].real.max()
        self.assertLess(np.abs(mode.field['Ey'] / largest - np.cos(np.pi * x)[:, None]).max(), 5e-3)
        self.assertLess(np.abs(mode.field['Ey'][[0, -1]]).max(), 1e-12 * largest)
        for name in ('Ex', 'Ez', 'Hy'):
            scale = largest if name[0] == 'E' else np.abs(mode.field['Hx']).max()
            self.assertLess(np.abs(mode.field[name]).max(), 1e-6 * scale)
        # S_z averages over cos² to a half: ½ · E²β/(k0 Z0) · ab/2 = 1 W.
        expected = np.sqrt(4 * Z0 / mode.about['index'].real / (1e-6 * 0.6e-6))
        self.assertAlmostEqual(largest / expected, 1, delta=5e-3)

    def test_absorbing_layers_are_told(self):
        mode = Mode(self.fields(LEAKY, '--count=1')['section/1550nm/mode0'])
        low, high = mode.about['reliable_y_um']
        self.assertGreater(low, mode.places['y_lines_um'][0] + 0.1)
        self.assertLess(low, -0.7)
        self.assertEqual(high, mode.places['y_lines_um'][-1])
        self.assertGreater(mode.about['index'].imag, 0)
        self.assertAlmostEqual(mode.power(), 1, delta=1e-12)

    def test_leaking_on_all_sides(self):
        path = self.write(MOAT)
        done = self.run_tool('modes', '--fields', 'f.h5', '--json', '--count=1', '--accuracy=1e-3', path)
        answer = tool.document(done.stdout, 'modes')['results'][0]['points'][0]['modes'][0]
        with h5py.File(self.folder / 'f.h5') as file:
            index = file['section/1000nm/mode0'].attrs['index']
        # One coarse grid: 1e-4 measured, and 3 % of the loss; a wave of the surroundings has 1.499 and 70 times that.
        self.assertAlmostEqual(index.real / answer['index']['value'], 1, delta=1e-3)
        loss = 20 / np.log(10) * 2 * np.pi * index.imag * 1e4  # dB per cm; the wavelength is 1 um
        self.assertAlmostEqual(loss / answer['loss_db_per_cm']['value'], 1, delta=0.1)

    def test_indices_are_near_the_answer(self):
        path = self.write(WIRE)
        done = self.run_tool('modes', '--fields', 'f.h5', '--json', '--count=2', '--accuracy=1e-3', path)
        modes = tool.document(done.stdout, 'modes')['results'][0]['points'][0]['modes']
        with h5py.File(self.folder / 'f.h5') as file:
            for order, mode in enumerate(modes):
                index = file[f'section/1550nm/mode{order}'].attrs['index']
                # One grid of 12 steps per wavelength, no extrapolation: 3e-3 and 6e-3 measured.
                self.assertAlmostEqual(index.real / mode['index']['value'], 1, delta=1e-2)

    def test_a_wavelength_without_a_mode(self):
        text = WIRE.replace('fill: core', 'fill: silicon').replace('1550', '[200, 1550]')
        file = self.fields(text, '--count=1', status=1)
        self.assertEqual(list(file['section/200nm']), [])
        self.assertIn('silicon', file['section/200nm'].attrs['note'])
        self.assertEqual(list(file['section/1550nm']), ['mode0'])

    def test_what_is_refused(self):
        path = self.write(WIRE)
        self.assert_refused('modes', '--fields', 'no/folder/a.h5', path, status=3, says=['no/folder/a.h5'])
        self.assert_refused('modes', '--fields', path, path, says=['problem file'])
        none = self.write(WIRE.replace('fill: core', 'fill: oxide'), 'none.yaml')
        self.run_tool('modes', '--fields', 'a.h5', none, status=1)
        self.assert_refused('modes', '--fields', 'a.h5', self.write(tool.film(), 'film.yaml'), says=['section'])
        self.assert_refused('modes', '--fields', 'a.h5', '--set', 'section.bend_radius_um=20', path,
                            says=['straight sections only'])
        self.assertEqual(sorted(p.name for p in self.folder.iterdir()), ['film.yaml', 'none.yaml', 'problem.yaml'])

    def test_the_example(self):
        self.fields(BOX, '--count=1').close()
        done = subprocess.run([sys.executable, str(tool.SOURCE / 'examples' / 'read_fields.py'), 'fields.h5'],
                              cwd=self.folder, capture_output=True, text=True, check=False)
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertRegex(done.stdout, r'/section/1000nm/mode0: index 1\.35\d+.*largest \|Ey\| .* V/m\n')

    @unittest.skipIf(tool.INSTRUMENTED, 'the library cannot be loaded into a plain Python')
    def test_the_interface_gives_the_same_values(self):
        mode = Mode(self.fields(WIRE, '--count=2')['section/1550nm/mode1'])
        lib = ctypes.CDLL(os.path.join(os.environ['PICKET_BUILD_DIR'], 'libpicket.so.0'))
        pointer, text, double, size = ctypes.c_void_p, ctypes.c_char_p, ctypes.c_double, ctypes.c_size_t
        options = ctypes.create_string_buffer(200)
        context, problem, field = pointer(), pointer(), pointer()
        lib.picket_options_init(options)
        lib.picket_options_set.argtypes = [pointer, text, double]
        self.assertEqual(lib.picket_options_set(options, b'accuracy', 1e-2), 0)
        self.assertEqual(lib.picket_context_create(None, ctypes.byref(context)), 0)
        self.assertEqual(lib.picket_problem_read_file(context, str(self.folder / 'problem.yaml').encode(),
                                                      ctypes.byref(problem)), 0)
        lib.picket_section_field_find.argtypes = [pointer, pointer, double, ctypes.c_int, pointer]
        self.assertEqual(lib.picket_section_field_find(problem, options, 1.55, 1, ctypes.byref(field)), 0)
        lib.picket_section_field_component.argtypes = [pointer, ctypes.c_int, pointer, size]
        lib.picket_section_field_permittivity.argtypes = [pointer, ctypes.c_int, pointer, size]
        lib.picket_section_field_places.argtypes = [pointer, ctypes.c_int, ctypes.c_int, pointer, size]

        def asked(function, *words, like):
            values = np.full_like(like, -7)
            count = values.size * values.itemsize // 8
            self.assertEqual(function(field, *words, values.ctypes.data, count - 1), -1)
            self.assertEqual(function(field, *words, values.ctypes.data, count), 0)
            return values
        for which, name in enumerate(NAMES):
            nx, ny = ctypes.c_int(), ctypes.c_int()
            self.assertEqual(lib.picket_section_field_size(field, which, ctypes.byref(nx), ctypes.byref(ny)), 0)
            self.assertEqual((nx.value, ny.value), mode.field[name].shape)
            np.testing.assert_array_equal(asked(lib.picket_section_field_component, which, like=mode.field[name]),
                                          mode.field[name])
            for axis, places in enumerate(mode.coordinates(name), 1):  # PICKET_AXIS_X is 1
                np.testing.assert_array_equal(asked(lib.picket_section_field_places, which, axis, like=places), places)
        for which, axis in enumerate(('xx', 'yy', 'zz')):
            np.testing.assert_array_equal(
                asked(lib.picket_section_field_permittivity, which, like=mode.permittivity[axis]),
                mode.permittivity[axis])
        lib.picket_section_field_free(field)
        lib.picket_problem_free(problem)
        lib.picket_context_free(context)


if __name__ == '__main__':
    unittest.main()
