"""index: its answer as text, JSON and CSV, its worker processes, its journal."""

import csv
import io
import os
import unittest

import tool

# A silicon segment of half the pitch, seen from the side, in oxide, at 1550 nm: Bloch index of a
# Fourier-modal computation made for this project, eight digits.
ROW_INDEX = {'ey': 2.1543451, 'hy': 1.5962347}
ROW_GROUP = {'ey': 2.92743, 'hy': 1.93312}

ROW = tool.MATERIALS.format(name='row') + '''light: {wavelength_nm: [1500, 1550], polarization: both}
cell: {pitch_nm: 200, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 100, width_nm: 220, at_nm: [0, 0]}}]}
'''
ROUGH = '--accuracy=1e-2'


def layers(core='core', wavelengths='[1500, 1550]'):
    """A stack of layers: a sweep over it takes no time."""
    return tool.stack().replace('[1500, 1580]', wavelengths).replace('fill: core', f'fill: {core}')


class Index(tool.ToolTest):
    def test_text_json_and_csv(self):
        path = self.write(ROW)
        plain = self.run_tool('index', path, ROUGH).stdout
        done = self.run_tool('index', '--json', '--csv', 'table.csv', path, ROUGH)
        document = tool.document(done.stdout, 'index')
        rows = list(csv.DictReader(io.StringIO((self.folder / 'table.csv').read_text(encoding='utf-8'))))
        self.assertEqual([a['polarization'] for a in document['results']], ['ey', 'hy'])
        self.assertEqual(len(rows), 4)
        for number, answer in enumerate(document['results']):
            self.assertEqual([p['wavelength_nm'] for p in answer['points']], [1500, 1550])
            mode, = answer['points'][1]['modes']
            word = answer['polarization']
            for key, reference, digits in (('bloch_index', ROW_INDEX[word], 5e-8), ('group_index', ROW_GROUP[word], 5e-6)):
                quantity = mode[key]
                self.assertAlmostEqual(quantity['value'], reference, delta=quantity['uncertainty'] + digits)
            self.assertEqual(mode['regime'], 'subwavelength')
            self.assertEqual(mode['radiated'], [])
            row = rows[2 * number + 1]
            self.assertEqual((row['polarization'], row['wavelength_nm'], row['order']), (word, '1550', '0'))
            self.assertEqual(float(row['bloch_index']), mode['bloch_index']['value'])
        self.assertRegex(plain, r'^ey: Bloch index 2\.1\d+ to 2\.\d+, subwavelength\n')
        self.assertIn('group index', plain)
        self.assertIn('Two-dimensional model', plain)

    def test_jobs_change_nothing(self):
        path = self.write(ROW)
        alone = self.run_tool('index', '--json', path, ROUGH, '--jobs', '1').stdout
        self.assertEqual(self.run_tool('index', '--json', path, ROUGH, '--jobs', '2').stdout, alone)

    def test_one_wavelength_that_fails(self):
        path = self.write(layers('silicon', '[1100, 1550]'))
        done = self.run_tool('index', '--json', path, ROUGH, status=1)
        document = tool.document(done.stdout, 'index')
        self.assertFalse(document['complete'])
        self.assertIn('1 of 2 points', document['shortfall'])
        first, second = document['results'][0]['points']
        self.assertTrue(first['failed'])
        self.assertIn('silicon', first['note'])
        self.assertEqual(len(second['modes']), 1)
        plain = self.run_tool('index', path, ROUGH, status=1).stdout
        self.assertTrue(plain.startswith('PARTIAL RESULT: 1 of 2 points'), plain)
        self.assertIn('FAILED at 1100 nm', plain)

    def test_refusals(self):
        self.assert_refused('index', self.write(layers('silicon', '[1000, 1100]')), says=['silicon', '1000 nm', '1200'])
        self.assert_refused('index', self.write(tool.film()), says=['cell'])
        text = layers().replace('wavelength_nm: [1500, 1550], ', '')
        self.assert_refused('index', self.write(text), says=['light.wavelength_nm'])


class Journal(tool.ToolTest):
    def setUp(self):
        super().setUp()
        self.path = self.write(layers())

    def test_it_is_kept_and_used(self):
        first = self.run_tool('index', '--json', self.path, '--resume', 'j').stdout
        kept = (self.folder / 'j').read_bytes()
        self.assertEqual(self.run_tool('index', '--json', self.path, '--resume', 'j').stdout, first)
        self.assertEqual((self.folder / 'j').read_bytes(), kept)
        self.assertEqual(self.run_tool('index', '--json', self.path).stdout, first)
        self.assertEqual(kept.count(b'\n'), 3)

    def test_a_foreign_journal(self):
        self.run_tool('index', self.path, '--resume', 'j')
        kept = (self.folder / 'j').read_bytes()
        self.assert_refused('index', self.path, '--resume', 'j', '--set', 'cell.pitch_nm=210', says=['j', 'another problem'])
        self.assert_refused('index', self.path, '--resume', 'j', ROUGH, says=['other options'])
        self.assertEqual((self.folder / 'j').read_bytes(), kept)
        whole = (self.folder / 'problem.yaml').read_bytes()
        self.assert_refused('index', self.path, '--resume', self.path, says=['no journal'])
        self.assertEqual((self.folder / 'problem.yaml').read_bytes(), whole)

    def test_another_table_is_another_problem(self):
        table = 'wavelength_nm,n,k\n1400,3.4,0\n1500,3.41,0\n1600,3.42,0\n1700,3.43,0\n'
        self.write(table, 'glass.csv')
        path = self.write(layers().replace('materials:\n', 'materials:\n  core2: {table: {csv: glass.csv}}\n')
                          .replace('fill: core', 'fill: core2'))
        self.run_tool('index', path, '--resume', 'j')
        self.write(table.replace('3.41', '3.415'), 'glass.csv')
        self.assert_refused('index', path, '--resume', 'j', says=['another problem'])

    def test_a_place_that_cannot_be_written(self):
        self.assert_refused('index', self.path, '--resume', 'no/folder/j', status=3, says=['no/folder/j'])

    @unittest.skipUnless(os.path.exists('/dev/full'), 'no /dev/full')
    def test_a_device_is_no_journal(self):
        self.assert_refused('index', self.path, '--resume', '/dev/full', says=['/dev/full', 'not a plain file'])


if __name__ == '__main__':
    unittest.main()
