"""picket match: a mode of a section with a Gaussian beam, or with a mode of a second section."""

import csv
import unittest

import tool

HEAD = '''format: 1
name: {name}
light: {{wavelength_nm: 1550}}
materials:
  core: {{constant: {{index: {core}}}}}
  clad: {{constant: {{index: 1.444}}}}
section:
  cladding: clad
  shapes:
'''
FIBRE = HEAD.format(name='fibre', core=1.4492) + '    - disc: {fill: core, diameter_nm: 8200}\n'
WIRE = (HEAD.format(name='wire', core=3.4757)
        + '    - rect: {fill: core, width_nm: 450, height_nm: 220, at_nm: [0, 110]}\n')


class Match(tool.ToolTest):
    def setUp(self):
        super().setUp()
        self.fibre = self.write(FIBRE, 'fibre.yaml')
        self.wire = self.write(WIRE, 'wire.yaml')

    def ask(self, *words):
        done = self.run_tool('match', '--json', *words)
        document = tool.document(done.stdout, 'match')
        answer, = document['results']
        return answer, answer['points'][0]

    def test_a_fibre_and_its_best_beam(self):
        # Overlap 0.99236 of the fundamental mode with a beam of 10.152 um: characteristic equation
        # of the step-index fibre (closed form); that of the vector mode differs by up to 1e-4.
        table = self.folder / 'match.csv'
        answer, point = self.ask(self.fibre, '--gaussian-um', '10.152', '--csv', str(table))
        self.assertEqual([answer['with'], answer['gaussian_x_um']], ['gaussian', 10.152])
        self.assertIn('reflection', answer['limits'])
        share = point['coupling']['share']
        self.assertAlmostEqual(share['value'], 0.99236, delta=1e-4 + share['uncertainty'])
        self.assertLess(share['uncertainty'], 1e-4)
        self.assertAlmostEqual(point['coupling']['share_db']['value'], -0.0333, delta=2e-3)
        for key in ('offset_x_nm', 'offset_y_nm'):
            self.assertAlmostEqual(point['best'][key]['value'], 0, delta=0.02)
        self.assertIsNone(point['index_b']['value'])
        row, = csv.DictReader(table.read_text(encoding='utf-8').splitlines())
        self.assertEqual(float(row['share']), share['value'])
        self.assertEqual(row['mode_b'], '')

    def test_a_moved_and_tilted_beam(self):
        # Two Gaussian beams of equal w: exp(-d²/w²) and exp(-(pi n w sin t/lambda)²), D. Marcuse,
        # Bell Syst. Tech. J. 56, 703 (1977), from memory of the source; a fibre's mode is near to one.
        words = (self.fibre, '--gaussian-um', '10.152', '--accuracy', '1e-3')
        _, straight = self.ask(*words, '--offset-nm', '0,0')
        _, moved = self.ask(*words, '--offset-nm', '0,-2000')
        _, tilted = self.ask(*words, '--offset-nm', '0,0', '--tilt-deg', '2,0')
        whole = straight['coupling']['share']['value']
        self.assertAlmostEqual(moved['coupling']['share']['value'] / whole, 0.8563, delta=0.01)
        self.assertAlmostEqual(tilted['coupling']['share']['value'] / whole, 0.7588, delta=0.02)
        self.assertEqual(moved['coupling']['offset_y_nm'], {'value': -2000, 'uncertainty': 0})
        self.assertIsNone(moved['best']['share']['value'])

    def test_a_mode_with_itself(self):
        answer, point = self.ask(self.wire, self.wire, '--accuracy', '1e-3')
        self.assertEqual(answer['with'], 'wire')
        self.assertEqual(point['mode_b'], 0)
        for place in ('coupling', 'best'):
            self.assertAlmostEqual(point[place]['share']['value'], 1, delta=1e-9)
        _, point = self.ask(self.wire, self.wire, '--mode', '1', '--mode-b', '0', '--offset-nm', '0,0',
                            '--accuracy', '1e-3')
        self.assertAlmostEqual(point['coupling']['share']['value'], 0, delta=1e-9)

    def test_a_fibre_butted_to_a_wire(self):
        # A fact of the trade: about 1 %.
        _, point = self.ask(self.wire, self.fibre, '--accuracy', '1e-3')
        share = point['best']['share']
        self.assertGreater(share['value'], 0.001)
        self.assertLess(share['value'], 0.05)
        # The wire lies 110 nm above the origin of its file.
        self.assertAlmostEqual(point['best']['offset_y_nm']['value'], 110, delta=100)
        text = self.run_tool('match', self.wire, self.fibre, '--accuracy', '1e-2').stdout
        self.assertIn('Not included: reflection', text)

    def test_what_is_wrong_is_said(self):
        bare = self.write(tool.film(), 'film.yaml')
        for words, says in (
                ((self.fibre, '--gaussian-um', '-3'), ['--gaussian-um', '-3', 'above 0']),
                ((self.fibre, '--gaussian-um', '5,0'), ['--gaussian-um', '5,0']),
                ((self.fibre, '--gaussian-um', 'wide'), ['wide']),
                ((self.fibre, '--gaussian-um', '5', '--tilt-deg', 'nan,0'), ['--tilt-deg', 'nan,0']),
                ((self.fibre, '--gaussian-um', '5', '--tilt-deg', '0,31'), ['-30 to 30']),
                ((self.fibre, '--gaussian-um', '5', '--offset-nm', '3'), ['--offset-nm']),
                ((self.fibre, '--gaussian-um', '5', '--along', 'z'), ['x or y']),
                ((self.fibre, '--gaussian-um', '5', '--medium-index', '0'), ['1 to 10']),
                ((self.fibre, '--gaussian-um', '5', '--mode', '200'), ['0 to 199']),
                ((self.fibre, '--gaussian-um', '5', '--mode', '9'), ['mode 9']),
                ((self.fibre, self.wire, '--mode-b', '50'), ['mode 50']),
                ((self.fibre,), ['second file']),
                ((self.fibre, self.wire, '--gaussian-um', '5'), ['not both']),
                ((self.fibre, self.wire, self.fibre), ['one file too many']),
                ((self.fibre, bare), ['second', 'section']),
                ((bare, self.fibre), ['first', 'section']),
                ((self.fibre, self.write('{', 'broken.yaml')), ['broken.yaml'])):
            with self.subTest(words=words):
                self.assert_refused('match', *words, says=says)
        self.assert_refused('modes', self.fibre, '--mode', '0', says=['--mode', 'picket match'])


if __name__ == '__main__':
    unittest.main()
