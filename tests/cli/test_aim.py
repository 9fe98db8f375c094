"""picket aim: the dimension that meets a target, as text, JSON and CSV."""

import csv
import json
import unittest

import tool

AIM = '''aim: {vary: cell.pitch_nm, between: [150, 260], quantity: long_nm, target: 1200}
rules: {smallest_feature_nm: 60, grid_nm: 1}
'''


class Aim(tool.ToolTest):
    def ask(self, text, *words, status=0):
        done = self.run_tool('aim', '--json', self.write(text), '--accuracy', '1e-3', *words, status=status)
        document = tool.document(done.stdout, 'aim')
        return document, document['results']

    def test_a_pitch_for_an_edge(self):
        path, table = self.write(tool.stack() + AIM), self.folder / 'aim.csv'
        done = self.run_tool('aim', path, '--accuracy', '1e-3', '--csv', str(table))
        for words in ('ey: found', 'cell.pitch_nm between 150 and 260', 'direct solves', 'on the mask grid',
                      'smallest feature 8', 'as the rules allow', 'unique: yes'):
            self.assertIn(words, done.stdout)
        document, (answer,) = self.ask(tool.stack() + AIM)
        self.assertTrue(document['complete'])
        self.assertEqual((answer['polarization'], answer['vary'], answer['quantity'], answer['target']),
                         ('ey', 'cell.pitch_nm', 'long_nm', 1200))
        self.assertTrue(answer['found'])
        self.assertTrue(answer['unique'])
        self.assertEqual(answer['derivative_by'], 'analytic')
        self.assertLessEqual(answer['solves'], 6)
        self.assertAlmostEqual(answer['achieved']['value'], 1200, delta=0.6)
        # The gap between the teeth of 100 nm.
        self.assertAlmostEqual(answer['smallest_feature_nm'], answer['value']['value'] - 100, delta=1e-6)
        self.assertTrue(answer['respects_rules'])
        self.assertEqual(answer['snapped']['value'], round(answer['value']['value']))
        self.assertTrue(answer['snapped']['respects_rules'])
        self.assertIsNone(answer['also'])
        # The same edge by the command that knows nothing of aiming.
        edges = tool.document(self.run_tool('edges', '--json', path, '--accuracy', '1e-3', '--set',
                                            f'cell.pitch_nm={answer["value"]["value"]!r}').stdout, 'edges')
        self.assertAlmostEqual(edges['results'][0]['stop_bands'][0]['long_nm']['value'],
                               answer['achieved']['value'], delta=1e-9)
        row, = csv.DictReader(table.read_text(encoding='utf-8').splitlines())
        self.assertEqual(float(row['value']), answer['value']['value'])
        self.assertEqual(float(row['snapped']), answer['snapped']['value'])
        self.assertEqual(row['respects_rules'], 'true')

    def test_one_answer_per_polarization(self):
        _, answers = self.ask(tool.stack() + AIM, '--set', 'light.polarization=both')
        self.assertEqual([a['polarization'] for a in answers], ['ey', 'hy'])
        # In a stack crossed at right angles the two polarizations are the same.
        self.assertAlmostEqual(answers[0]['value']['value'], answers[1]['value']['value'],
                               delta=answers[0]['value']['uncertainty'] + answers[1]['value']['uncertainty'])

    def test_two_targets(self):
        also = '{vary: cell.shapes.0.to_nm, between: [10, 90], quantity: short_nm, target: 800}'
        _, (answer,) = self.ask(tool.stack() + AIM, '--set', f'aim.also={also}')
        self.assertEqual(answer['also']['vary'], 'cell.shapes.0.to_nm')
        self.assertAlmostEqual(answer['achieved']['value'], 1200, delta=0.6)
        self.assertAlmostEqual(answer['also']['achieved']['value'], 800, delta=0.4)
        self.assertIsNone(answer['ends'])
        self.assertIn('value', answer['also']['snapped'])

    def test_no_solution(self):
        document, (answer,) = self.ask(tool.stack() + AIM, '--set', 'aim.target=3000', status=1)
        self.assertFalse(document['complete'])
        self.assertIn('does not meet 3000', document['shortfall'])
        self.assertFalse(answer['found'])
        self.assertIsNone(answer['value']['value'])
        self.assertEqual([end['at'] for end in answer['ends']], [150, 260])
        low, high = (end['achieved']['value'] for end in answer['ends'])
        self.assertLess(low, high)
        self.assertLess(high, 3000)
        done = self.run_tool('aim', self.write(tool.stack() + AIM), '--set', 'aim.target=3000', '--accuracy',
                             '1e-3', status=1)
        self.assertIn('PARTIAL RESULT', done.stdout)
        self.assertIn('ey: no solution', done.stdout)

    def test_what_it_needs(self):
        self.assert_refused('aim', self.write(tool.stack()), says=['no "aim"'])
        film = tool.film() + 'aim: {vary: temperature_c, between: [0, 50], quantity: long_nm, target: 5}\n'
        self.assert_refused('aim', self.write(film), says=['problem.yaml:', 'aim.vary', 'temperature_c'])
        film += 'temperature_c: 20\n'
        self.assert_refused('aim', self.write(film), says=['problem.yaml:', 'cell'])

    def test_bad_keys(self):
        path = self.write(tool.stack() + AIM)
        for change, says in (('aim.vary=cell.pitch', ['aim.vary', 'cell.pitch']),
                             ('aim.between=[260, 150]', ['aim.between', 'rising']),
                             ('aim.quantity=long', ['aim.quantity', 'long_nm']),
                             ('aim.quantity=bloch_index', ['at_nm']),
                             ('aim.targt=3', ['targt', 'target']),
                             ('aim.target=wide', ['aim.target', 'number']),
                             ('rules.grid_nm=0', ['rules.grid_nm', 'above 0'])):
            with self.subTest(change):
                self.assert_refused('aim', path, '--set', change, says=says)
                self.assert_refused('check', path, '--set', change, says=says)

    def test_help(self):
        self.assertIn('picket aim', self.run_tool('aim', '--help').stdout)
        self.assertIn('  aim ', self.run_tool('--help').stdout)

    def test_the_same_twice(self):
        path = self.write(tool.stack() + AIM)
        first, second = (self.run_tool('aim', '--json', path, '--accuracy', '1e-3').stdout for _ in range(2))
        self.assertEqual(json.loads(first), json.loads(second))


if __name__ == '__main__':
    unittest.main()
