"""picket taper: a row that changes tooth by tooth, as text, JSON and CSV."""

import csv
import json
import unittest

import tool

TAPER = '''taper:
  teeth: 4
  at_nm: 1550
  changes:
    - {vary: cell.shapes.0.to_nm, from: 0, to: 60, law: cosine}
'''

# A guide of a single film of 450 nm seen from above, with teeth.
ROW = tool.MATERIALS.format(name='row') + '''light: {polarization: hy}
cell:
  pitch_nm: 300
  cladding: oxide
  shapes:
    - rect: {fill: core, length_nm: 150, width_nm: 300}
rules: {smallest_feature_nm: 145}
taper:
  teeth: 3
  at_nm: 1900
  changes:
    - {vary: cell.shapes.0.width_nm, from: 300, to: 240}
    - {vary: cell.shapes.0.length_nm, from: 150, to: 140, law: power, exponent: 2}
  fibre: {gaussian_um: 2.5}
'''


class Taper(tool.ToolTest):
    def ask(self, text, *words, status=0):
        done = self.run_tool('taper', '--json', self.write(text), '--accuracy', '1e-3', *words, status=status)
        document = tool.document(done.stdout, 'taper')
        return document, document['results']

    def test_a_row(self):
        table = self.folder / 'row.csv'
        document, (row,) = self.ask(ROW, '--csv', str(table))
        self.assertTrue(document['complete'])
        self.assertEqual((row['polarization'], row['wavelength_nm'], row['fibre_um']), ('hy', 1900, 2.5))
        self.assertAlmostEqual(row['length_um'], 0.9, delta=1e-12)
        self.assertEqual([change['law'] for change in row['changes']], ['linear', 'power'])
        self.assertEqual([change['exponent'] for change in row['changes']], [None, 2])
        teeth = row['teeth']
        self.assertEqual([t['values'] for t in teeth], [[300, 150], [270, 147.5], [240, 140]])
        self.assertEqual([t['warnings'] for t in teeth if 'small-feature' in t['warnings']], [teeth[2]['warnings']])
        product = 1
        for before, t in zip(teeth, teeth[1:]):
            self.assertLess(t['bloch_index']['value'], before['bloch_index']['value'])
            self.assertGreater(t['clearance_nm']['value'], before['clearance_nm']['value'])
            self.assertGreater(t['mode_size_um']['value'], before['mode_size_um']['value'])
            self.assertLess(before['overlap_next']['value'], 1)
            self.assertGreater(before['adiabatic'], 0)
            product *= before['overlap_next']['value']
        self.assertAlmostEqual(row['transmission']['value'], product, delta=1e-12)
        self.assertIn('no next one', teeth[2]['overlap_next']['note'])
        self.assertEqual(row['fibre_share'], teeth[2]['fibre_share'])
        rows = list(csv.DictReader(table.read_text(encoding='utf-8').splitlines()))
        self.assertEqual([float(r['cell.shapes.0.width_nm']) for r in rows], [300, 270, 240])
        self.assertEqual([float(r['bloch_index']) for r in rows], [t['bloch_index']['value'] for t in teeth])
        self.assertEqual(rows[2]['overlap_next'], '')
        self.assertIn('small-feature', rows[2]['warnings'])

    def test_text(self):
        done = self.run_tool('taper', self.write(ROW), '--accuracy', '1e-2', '--set', 'taper.teeth=2')
        for words in ('hy: 2 teeth over 0.6 um at 1900 nm', 'cell.shapes.0.width_nm from 300 to 240, linear',
                      'power 2', 'product of all overlaps', 'a fibre of 2.5 um at the end', 'small-feature',
                      'abrupt', '2 of 2 teeth with warnings', 'Love'):
            self.assertIn(words, done.stdout)

    def test_plain_ends(self):
        """The same guide without teeth at both ends passes everything on."""
        _, rows = self.ask(ROW, '--set', 'taper.changes=[{vary: cell.shapes.0.length_nm, from: 300, to: 300}]',
                           '--set', 'light.polarization=both')
        self.assertEqual([row['polarization'] for row in rows], ['ey', 'hy'])
        for row in rows:
            for t in row['teeth'][:-1]:
                self.assertAlmostEqual(t['overlap_next']['value'], 1, delta=1e-9)
            self.assertAlmostEqual(row['transmission']['value'], 1, delta=1e-9)

    def test_resume_and_jobs(self):
        text = tool.stack() + TAPER
        journal = str(self.folder / 'teeth')
        _, once = self.ask(text, '--jobs', '1')
        _, kept = self.ask(text, '--jobs', '2', '--resume', journal)
        _, again = self.ask(text, '--resume', journal)
        self.assertEqual(once, kept)
        self.assertEqual(once, again)
        self.assert_refused('taper', self.write(text), '--resume', journal, '--accuracy', '1e-3', '--set',
                            'taper.teeth=5', says=['teeth', 'another'])

    def test_what_it_needs(self):
        self.assert_refused('taper', self.write(tool.stack()), says=['no "taper"'])
        film = tool.film() + ('taper: {teeth: 3, at_nm: 1550, changes: [{vary: materials.core.constant.index, '
                              'from: 3, to: 2}]}\n')
        self.assert_refused('taper', self.write(film), says=['problem.yaml:', 'needs a "cell"'])
        self.assert_refused('taper', self.write(tool.stack() + TAPER), '--set', 'taper.changes.0.to=-60',
                            says=['problem.yaml:', 'as tooth'])
        self.assert_refused('taper', self.write(tool.stack() + TAPER), '--sweep', 'cell.pitch_nm=200,210',
                            says=['--sweep'])

    def test_bad_keys(self):
        path = self.write(ROW)
        for change, says in (
                ('taper=5', ['taper']),
                ('taper.teeth=1', ['taper.teeth', '2 to 2000']),
                ('taper.teeth=2001', ['taper.teeth', '2 to 2000']),
                ('taper.teeth=3.5', ['taper.teeth', 'whole']),
                ('taper.at_nm=0', ['taper.at_nm']),
                ('taper.at_nm=.nan', ['taper.at_nm']),
                ('taper.at_nm=[1500, 1550]', ['taper.at_nm', 'number']),
                ('taper.tooths=3', ['tooths', 'teeth']),
                ('taper.changes=[]', ['taper.changes', '1 to 16']),
                ('taper.changes=5', ['taper.changes', 'list']),
                ('taper.changes.0.vary=cell.pitch', ['taper.changes.0.vary', 'cell.pitch']),
                ('taper.changes.0.vary=cell.shapes.0', ['taper.changes.0.vary', 'single finite number']),
                ('taper.changes.0.vary=taper.teeth', ['taper.changes.0.vary', 'taper.teeth']),
                ('taper.changes.0.vary=rules.smallest_feature_nm', ['taper.changes.0.vary']),
                ('taper.changes.0.vary=cell.shapes.0.length_nm', ['taper.changes.1.vary', 'again']),
                ('taper.changes.0.from=wide', ['taper.changes.0.from', 'number']),
                ('taper.changes.0.from=.inf', ['taper.changes.0.from']),
                ('taper.changes.0.to=1e10', ['taper.changes.0.to']),
                ('taper.changes.0.law=lineal', ['taper.changes.0.law', 'linear']),
                ('taper.changes.0.law=power', ['taper.changes.0.law', 'exponent']),
                ('taper.changes.0.exponent=2', ['taper.changes.0.exponent', 'power']),
                ('taper.changes.1.exponent=0', ['taper.changes.1.exponent', '0.01']),
                ('taper.changes.1.exponent=-1', ['taper.changes.1.exponent', '0.01']),
                ('taper.fibre=10.4', ['taper.fibre']),
                ('taper.fibre.gaussian_um=0', ['taper.fibre.gaussian_um', 'above 0']),
                ('taper.fibre.gaussian_um=1e4', ['taper.fibre.gaussian_um', '1000']),
                ('taper.fibre.gauss_um=3', ['gauss_um', 'gaussian_um'])):
            with self.subTest(change):
                self.assert_refused('taper', path, '--set', change, says=says)
                self.assert_refused('check', path, '--set', change, says=says)

    def test_no_light_of_its_own(self):
        light = ROW.replace('light: {polarization: hy}', 'light: {polarization: hy, wavelength_nm: 1900}')
        self.assert_refused('taper', self.write(light), '--set', 'taper.changes.0.vary=light.wavelength_nm',
                            says=['taper.changes.0.vary', 'light.wavelength_nm', 'along a row'])

    def test_not_both(self):
        text = ROW + '''channel:
  pitch_nm: 300
  cladding: oxide
  shapes:
    - rect: {fill: core, width_nm: 450, height_nm: 220, at_nm: [0, 0], along_nm: [-75, 75]}
'''
        self.assert_refused('taper', self.write(text), '--set', 'taper.changes.0.vary=channel.pitch_nm',
                            says=['of cells or of channels'])

    def test_help(self):
        self.assertIn('picket taper', self.run_tool('taper', '--help').stdout)
        self.assertIn('  taper ', self.run_tool('--help').stdout)

    def test_the_same_twice(self):
        path = self.write(tool.stack() + TAPER)
        first, second = (self.run_tool('taper', '--json', path, '--accuracy', '1e-3').stdout for _ in range(2))
        self.assertEqual(json.loads(first), json.loads(second))


if __name__ == '__main__':
    unittest.main()
