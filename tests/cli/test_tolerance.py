"""picket tolerance: sensitivities, corners and yield, as text, JSON and CSV."""

import csv
import unittest

import tool

# The whole stack is scaled by one deviate, the temperature has a range.
TOLERANCE = '''tolerance:
  spreads:
    - {vary: cell.pitch_nm, sigma_nm: 2, group: scale}
    - {vary: cell.shapes.0.from_nm, sigma_nm: 0.2, group: scale}
    - {vary: temperature_c, from: -5, to: 70}
  require: {quantity: long_nm, at_most: 1295}
  samples: 2000
'''
ROUGH = ('--accuracy', '1e-3')


class Tolerance(tool.ToolTest):
    def ask(self, text, *words, status=0):
        done = self.run_tool('tolerance', '--json', self.write(text), *ROUGH, *words, status=status)
        document = tool.document(done.stdout, 'tolerance')
        return document, document['results']

    def test_text_json_and_csv(self):
        path, table = self.write(tool.stack() + TOLERANCE), self.folder / 'tolerance.csv'
        done = self.run_tool('tolerance', path, *ROUGH, '--csv', str(table))
        self.assertTrue(done.stdout.startswith('ey: yield '), done.stdout)
        for words in ('required: long_nm, nm, at most 1295', 'worst corner:', 'cell.pitch_nm, nm', 'sigma 2', '-5 to 70',
                      'analytic', 'three standard deviations', '2000 from seed 1', 'Wilson', 'by the surrogate',
                      'cannot be decided', 'design rules'):
            self.assertIn(words, done.stdout)
        document, (answer,) = self.ask(tool.stack() + TOLERANCE)
        self.assertTrue(document['complete'])
        self.assertEqual((answer['polarization'], answer['quantity'], answer['unit'], answer['at_most'], answer['at_least']),
                         ('ey', 'long_nm', 'nm', 1295, None))
        self.assertEqual([s['vary'] for s in answer['sensitivities']],
                         ['cell.pitch_nm', 'cell.shapes.0.from_nm', 'temperature_c'])
        self.assertEqual([(d['name'], d['kind']) for d in answer['deviates']],
                         [('scale', 'normal'), ('temperature_c', 'uniform')])
        self.assertEqual(len(answer['corners']), 4)
        self.assertEqual(answer['worst'], max((c['value'] for c in answer['corners']), key=lambda q: q['value']))
        self.assertIn(answer['worst_at']['temperature_c'], (-5, 70))
        self.assertEqual((answer['samples'], answer['seed']), (2000, 1))
        low, high = answer['yield_interval']
        self.assertTrue(0 < low <= answer['yield']['value'] <= high < 1)
        self.assertEqual(answer['judged']['by_surrogate'] + answer['judged']['direct'], 2000)
        self.assertEqual(len(answer['surrogate']['checks']), 12)
        self.assertEqual(sum(c['near_limit'] for c in answer['surrogate']['checks']), 4)
        with table.open(encoding='utf-8', newline='') as file:
            rows = list(csv.DictReader(file))
        self.assertEqual([row['row'] for row in rows],
                         ['nominal'] + 3 * ['sensitivity'] + [r['row'] for r in rows[4:8]] + ['yield'])
        self.assertEqual(sorted(row['row'] for row in rows[4:8]), 3 * ['corner'] + ['worst corner'])
        self.assertEqual([float(row['value']) for row in rows],
                         [answer['nominal']['value']] + [s['per_unit']['value'] for s in answer['sensitivities']] +
                         [c['value']['value'] for c in answer['corners']] + [answer['yield']['value']])
        self.assertEqual(float(rows[4]['cell.pitch_nm']), answer['corners'][0]['at']['cell.pitch_nm'])

    def test_jobs_and_journals_change_nothing(self):
        path = self.write(tool.stack() + TOLERANCE)
        plain = self.run_tool('tolerance', '--json', path, *ROUGH, '--jobs', '1').stdout
        self.assertEqual(self.run_tool('tolerance', '--json', path, *ROUGH, '--jobs', '2').stdout, plain)
        journal = self.folder / 'journal'
        for _ in range(2):
            words = ('tolerance', '--json', path, *ROUGH, '--jobs', '2', '--resume', str(journal))
            self.assertEqual(self.run_tool(*words).stdout, plain)
        lines = journal.read_text(encoding='utf-8').splitlines(keepends=True)
        for kept in (5, len(lines) - 1):
            journal.write_text(''.join(lines[:kept]) + lines[kept][:7], encoding='utf-8')
            self.assertEqual(self.run_tool(*words).stdout, plain)
            self.assertEqual(sorted(journal.read_text(encoding='utf-8').splitlines()[1:])[0].split(' ')[0], '0')
        self.assert_refused('tolerance', path, '--resume', str(journal), '--accuracy', '1e-2', says=['another problem'])

    def test_seed_and_polarizations(self):
        _, first = self.ask(tool.stack() + TOLERANCE, '--set', 'light.polarization=both')
        _, (other,) = self.ask(tool.stack() + TOLERANCE, '--set', 'tolerance.seed=2')
        self.assertEqual([a['polarization'] for a in first], ['ey', 'hy'])
        self.assertNotEqual(first[0]['yield']['value'], other['yield']['value'])
        self.assertEqual(first[0]['nominal'], other['nominal'])

    def test_nothing_to_require_of(self):
        document, (answer,) = self.ask(tool.stack() + TOLERANCE, '--set', 'tolerance.require={quantity: bloch_index, '
                                       'at_nm: 1250, at_least: 2}', status=1)
        self.assertFalse(document['complete'])
        self.assertIsNone(answer['yield']['value'])

    def test_what_it_needs(self):
        self.assert_refused('tolerance', self.write(tool.stack()), says=['no "tolerance"'])
        self.assert_refused('tolerance', self.write(tool.film() + '''tolerance:
  spreads: [{vary: temperature_c, from: 0, to: 70}]
  require: {quantity: long_nm, at_most: 1300}
'''), says=['problem.yaml:', 'long_nm', 'cell'])

    def test_bad_keys(self):
        path = self.write(tool.stack() + TOLERANCE)
        for change, says in (('tolerance.spreads.0.vary=cell.pitch', ['spreads.0.vary', 'cell.pitch']),
                             ('tolerance.spreads.0.sigma_nm=-2', ['spreads.0.sigma_nm', 'above 0']),
                             ('tolerance.spreads.0.sigma_nm=.nan', ['spreads.0.sigma_nm', 'number']),
                             ('tolerance.spreads.0.sigma=2', ['spreads.0', 'sigma and sigma_nm']),
                             ('tolerance.spreads.0.from=2', ['spreads.0', 'range']),
                             ('tolerance.spreads.2.from=80', ['spreads.2', 'rising']),
                             ('tolerance.spreads.2.group=scale', ['spreads.2', 'scale', 'one kind']),
                             ('tolerance.require={quantity: long_nm}', ['no limit']),
                             ('tolerance.require.between=[1, 2]', ['more than one limit']),
                             ('tolerance.require.quantity=long', ['long_nm']),
                             ('tolerance.smaples=5', ['smaples', 'samples']),
                             ('tolerance.samples=0', ['tolerance.samples', '1 to']),
                             ('tolerance.samples=1e9', ['tolerance.samples', '10000000'])):
            with self.subTest(change):
                self.assert_refused('tolerance', path, '--set', change, says=says)
                self.assert_refused('check', path, '--set', change, says=says)

    def test_help(self):
        self.assertIn('picket tolerance', self.run_tool('tolerance', '--help').stdout)
        self.assertIn('  tolerance ', self.run_tool('--help').stdout)


if __name__ == '__main__':
    unittest.main()
