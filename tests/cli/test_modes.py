"""picket modes: full-vector modes of a section, as text, JSON and CSV."""

import csv
import json
import math
import unittest

import tool

WIRE = tool.MATERIALS.format(name=json.dumps('wire')) + '''light: {wavelength_nm: 1550}
section:
  cladding: oxide
  shapes:
    - rect: {fill: core, width_nm: 450, height_nm: 220, at_nm: [0, 110]}
'''

# One medium between electric walls, whose modes are known in closed form.
FILLED = tool.MATERIALS.format(name=json.dumps('metal box')) + '''light: {wavelength_nm: [900, 1000]}
section:
  cladding: oxide
  span_nm: [1000, 600]
  shapes:
    - rect: {fill: oxide, width_nm: 500, height_nm: 300}
'''


# A step-index fibre of 8.2 um, 1.4492 in 1.4440.
FIBRE = WIRE.replace('    - rect: {fill: core, width_nm: 450, height_nm: 220, at_nm: [0, 110]}',
                     '    - disc: {fill: core, diameter_nm: 8200}').replace('3.476', '1.4492')

# Its mode-field diameters, um. Closed forms, by quadrature of the fields of the fundamental mode:
# scalar (the Bessel functions of the weakly guiding fibre), and of the exact vector mode (E. Snitzer,
# J. Opt. Soc. Am. 51, 491 (1961)) with E along x, where they differ along x and y.
SCALAR = {'petermann_um': 10.0152, 'rms_um': 10.3874, 'e2_x_um': 9.5345, 'e2_y_um': 9.5345,
          'gaussian_um': 10.152, 'gaussian_overlap': 0.99236}
VECTOR = {'petermann_um': 10.012585, 'rms_um': 10.394410, 'rms_x_um': 10.395415, 'rms_y_um': 10.393405,
          'e2_x_um': 9.540218, 'e2_y_um': 9.533644, 'gaussian_um': 10.145534, 'gaussian_overlap': 0.9923007}


class Modes(tool.ToolTest):
    def ask(self, text, *words, status=0):
        done = self.run_tool('modes', '--json', self.write(text), *words, status=status)
        document = tool.document(done.stdout, 'modes')
        answer, = document['results']
        return document, answer['points']

    def test_a_wire(self):
        path, table = self.write(WIRE), self.folder / 'modes.csv'
        done = self.run_tool('modes', '--count', '2', '--accuracy', '1e-3', '--csv', str(table), path)
        self.assertIn('te-like, 0 0', done.stdout)
        self.assertIn('tm-like, 0 0', done.stdout)
        self.assertIn('% in core', done.stdout)
        _, (point,) = self.ask(WIRE, '--count', '2', '--accuracy', '1e-3')
        te, tm = point['modes']
        self.assertEqual([te['order'], tm['order']], [0, 1])
        self.assertEqual([te['polarization'], tm['polarization']], ['te-like', 'tm-like'])
        self.assertGreater(te['ex_share'], 0.98)
        self.assertLess(tm['ex_share'], 0.06)
        for mode in (te, tm):
            self.assertEqual(mode['loss_db_per_cm'], {'value': 0, 'uncertainty': 0})
            self.assertAlmostEqual(sum(mode['confinement'].values()), 1, delta=1e-6)
            # Light that is slowed by geometry: the group index of a wire lies above its index.
            self.assertGreater(mode['group_index']['value'], mode['index']['value'])
        self.assertGreater(te['confinement']['core'], tm['confinement']['core'])
        self.assertIn('Petermann II', done.stdout)
        rows = list(csv.DictReader(table.read_text(encoding='utf-8').splitlines()))
        self.assertEqual([float(row['index']) for row in rows], [te['index']['value'], tm['index']['value']])
        self.assertEqual(float(rows[0]['e2_y_um']), te['diameters']['e2_y_um']['value'])

    def test_diameters_of_a_fibre(self):
        _, (point,) = self.ask(FIBRE, '--count', '2')
        for mode in point['modes']:
            found = mode['diameters']
            swap = {'x': 'y', 'y': 'x'} if mode['polarization'] == 'tm-like' else {'x': 'x', 'y': 'y'}
            for name, value in VECTOR.items():
                for axis in 'xy':
                    if f'_{axis}_' in name:
                        name = name.replace(f'_{axis}_', f'_{swap[axis]}_')
                        break
                self.assertAlmostEqual(found[name]['value'], value, delta=found[name]['uncertainty'], msg=name)
            for name, value in SCALAR.items():
                self.assertAlmostEqual(found[name]['value'], value, delta=1e-3 * value, msg=name)

    def test_diameters_that_do_not_exist(self):
        # The third mode of a wide wire has a node through its middle.
        text = WIRE.replace('width_nm: 450', 'width_nm: 900')
        _, (point,) = self.ask(text, '--count', '3', '--accuracy', '1e-3')
        mode = next(m for m in point['modes'] if m['nodes_x'] == 1)
        self.assertIsNone(mode['diameters']['gaussian_um']['value'])
        self.assertIn('centroid', mode['diameters']['gaussian_um']['note'])
        self.assertIsNone(mode['diameters']['e2_y_um']['value'])
        self.assertGreater(mode['diameters']['rms_um']['value'], 0.5)

    def test_a_box_of_metal(self):
        _, points = self.ask(FILLED, '--count', '3')
        for point, wavelength in zip(points, (0.9, 1.0)):
            known = [(1.444**2 - (p * wavelength / 2)**2 - (q * wavelength / 1.2)**2)**0.5
                     for p, q in ((1, 0), (0, 1), (1, 1))]
            for mode, index in zip(point['modes'], known):
                self.assertAlmostEqual(mode['index']['value'], index, delta=mode['index']['uncertainty'])
                # β dβ = ε k0 dk0 in a guide filled with one medium.
                self.assertAlmostEqual(mode['group_index']['value'], 1.444**2 / index,
                                       delta=mode['group_index']['uncertainty'])
            self.assertEqual(len(point['modes']), 3)

    def test_leaning_walls(self):
        """A trapezoid lies between the upright wires of its narrow and of its wide end."""
        def fundamental(text):
            _, (point,) = self.ask(text, '--count', '1', '--accuracy', '1e-3')
            return point['modes'][0]['index']
        leaning = fundamental(WIRE.replace('height_nm: 220', 'height_nm: 220, wall_angle_deg: 8'))
        half = 110 * math.tan(math.radians(8))
        narrow, wide = (fundamental(WIRE.replace('width_nm: 450', f'width_nm: {450 + sign * 2 * half}'))
                        for sign in (-1, 1))
        self.assertGreater(leaning['value'] - leaning['uncertainty'], narrow['value'] + narrow['uncertainty'])
        self.assertLess(leaning['value'] + leaning['uncertainty'], wide['value'] - wide['uncertainty'])

    def test_a_mode_pushed_out_by_its_window(self):
        # The third mode of the wire, 1.450, is at 1.4437 between walls 1180 nm apart: below the cladding.
        text = WIRE.replace(', at_nm: [0, 110]', '') + '  span_nm: [2600, 1180]\n'
        _, (point,) = self.ask(text, '--accuracy', '1e-2', status=1)
        self.assertEqual([mode['order'] for mode in point['modes']], [0, 1])
        _, (point,) = self.ask(text.replace('1180', '1300'), '--accuracy', '1e-2', status=1)
        self.assertEqual(len(point['modes']), 3)
        self.assertGreater(point['modes'][2]['index']['value'], 1.444)

    def test_a_section_that_guides_nothing(self):
        document, (point,) = self.ask(WIRE.replace('fill: core', 'fill: oxide'))
        self.assertEqual(point['modes'], [])
        self.assertIn('no guided mode was found', point['note'])
        self.assertTrue(document['complete'])

    def test_what_is_missing_is_said(self):
        self.assert_refused('modes', self.write(tool.film()), says=['section'])
        text = WIRE.replace('light: {wavelength_nm: 1550}\n', '')
        self.assert_refused('modes', self.write(text), says=['light.wavelength_nm'])

    def test_outside_the_range_of_a_material(self):
        text = WIRE.replace('fill: core', 'fill: silicon').replace('1550', '400')
        self.assert_refused('modes', self.write(text), says=['silicon', '400'])


if __name__ == '__main__':
    unittest.main()
