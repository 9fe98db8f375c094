"""What each command answers, as text, JSON and CSV, against values known in closed form."""

import csv
import io
import unittest

import tool


class Answers(tool.ToolTest):
    def ask(self, command, text, *words, status=0):
        """Text, document and rows of the same question."""
        path = self.write(text)
        table = self.folder / 'table.csv'
        plain = self.run_tool(command, path, *words, status=status).stdout
        done = self.run_tool(command, '--json', '--csv', str(table), path, *words, status=status)
        rows = list(csv.DictReader(io.StringIO(table.read_text(encoding='utf-8'))))
        return plain, tool.document(done.stdout, command), rows

    def test_edges(self):
        plain, document, rows = self.ask('edges', tool.stack())
        self.assertEqual((document['command'], document['name'], document['accuracy']), ('edges', 'stack', 1e-4))
        answer, = document['results']
        band = answer['stop_bands'][0]
        for key, reference in (('long_nm', tool.STACK_EDGES[0]), ('short_nm', tool.STACK_EDGES[1])):
            # The reference has eight digits after the point.
            slack = 200 * 5e-9 / reference**2 + band[key]['uncertainty']
            self.assertAlmostEqual(band[key]['value'], 200 / reference, delta=slack)
            self.assertAlmostEqual(float(rows[0][key]), band[key]['value'], delta=1e-9)
        self.assertTrue(band['confined'])
        clearance = answer['operating']['clearance_nm']['value']
        self.assertAlmostEqual(clearance, 1500 - band['long_nm']['value'], delta=1e-9)
        self.assertEqual(answer['operating']['regime'], 'subwavelength')
        centre = (band['long_nm']['value'] + band['short_nm']['value']) / 2
        error = answer['estimate']['error_nm']
        self.assertAlmostEqual(error['value'], answer['estimate']['centre_nm'] - centre, delta=1e-9)
        self.assertEqual(rows[0]['regime'], 'subwavelength')
        self.assertTrue(plain.startswith('ey: subwavelength from 1500 to 1580 nm; clearance 210.7'), plain)
        self.assertIn('Two-dimensional model', plain.splitlines()[-2])

    def test_edges_without_light(self):
        text = tool.stack().replace('light: {wavelength_nm: [1500, 1580], polarization: ey}\n', '')
        plain, document, rows = self.ask('edges', text)
        self.assertEqual(sorted(a['polarization'] for a in document['results']), ['ey', 'hy'])
        self.assertIsNone(document['results'][0]['operating'])
        self.assertEqual({row['clearance_nm'] for row in rows}, {''})
        self.assertIn('no operating band', plain)

    def test_count_of_stop_bands(self):
        _, document, rows = self.ask('edges', tool.stack(), '--count', '2')
        self.assertEqual([b['order'] for b in document['results'][0]['stop_bands']], [1, 2])
        self.assertEqual([row['order'] for row in rows], ['1', '2'])

    def test_bands(self):
        plain, document, rows = self.ask('bands', tool.stack(), '--count', '3', '--points', '2')
        answer, = document['results']
        self.assertEqual([point['k'] for point in answer['points']], [[0, 0], [0.5, 0], [1, 0]])
        self.assertEqual({len(point['frequency']) for point in answer['points']}, {3})
        edge = [q['value'] for q in answer['points'][2]['frequency'][:2]]
        self.assertAlmostEqual(edge[0], tool.STACK_EDGES[0], delta=1e-8)
        self.assertAlmostEqual(edge[1], tool.STACK_EDGES[1], delta=1e-8)
        gap = answer['gaps'][0]
        self.assertEqual((gap['below'], gap['from']['value'], gap['to']['value']), (1, *edge))
        self.assertEqual(len(rows), 3)
        self.assertAlmostEqual(float(rows[2]['band_2_pitch_per_wavelength']), edge[1], delta=1e-12)
        # 43.7884 % of the middle, from the table of one-dimensional stacks.
        self.assertIn('43.79 %', plain.splitlines()[0])

    def test_slab(self):
        plain, document, rows = self.ask('slab', tool.film())
        self.assertEqual([a['polarization'] for a in document['results']], ['te', 'tm'])
        mode, = document['results'][1]['points'][1]['modes']
        # Closed-form roots, ten and nine digits.
        self.assertAlmostEqual(mode['index']['value'], 2.0533196788, delta=1e-10)
        self.assertAlmostEqual(mode['group_index']['value'], 3.85992095, delta=1e-8)
        self.assertEqual(float(rows[3]['index']), mode['index']['value'])
        self.assertEqual(rows[3]['wavelength_nm'], '1550')
        self.assertIn('te: 1 guided mode\n', plain)
        self.assertIn('2.0533196788', plain)

    def test_slab_that_guides_nothing(self):
        plain, document, rows = self.ask('slab', tool.film(), '--set', 'slab.films.0.fill=oxide',
                                         '--set', 'slab.polarization=te')
        self.assertEqual([p['modes'] for p in document['results'][0]['points']], [[], []])
        self.assertEqual(rows, [])
        self.assertIn('te: no guided mode', plain)

    def test_check(self):
        plain, document, rows = self.ask('check', tool.stack())
        items = {item['name']: item for item in document['results']}
        self.assertIsNone(document['accuracy'])
        self.assertEqual(items['cell.duty']['value'], 0.5)
        self.assertAlmostEqual(items['cell.pitch']['value'], 200, delta=1e-9)
        self.assertEqual(items['cell.pitch']['unit'], 'nm')
        self.assertEqual(items['cell.lateral']['text'], 'uniform')
        self.assertIn('Li', items['materials.silicon.source']['text'])
        # The table of materials at 1550 nm has 3.4756878 at 20 °C; 1500 nm lies above it.
        self.assertGreater(items['materials.silicon.index_from']['value'], 3.4756878)
        self.assertEqual([row['name'] for row in rows], [item['name'] for item in document['results']])
        self.assertIn('problem.yaml is sound', plain.splitlines()[0])

    def test_the_same_question_has_the_same_answer(self):
        path = self.write(tool.stack())
        first = self.run_tool('edges', '--json', path).stdout
        self.assertEqual(self.run_tool('edges', '--json', path).stdout, first)

    def test_every_number_option_changes_or_limits_something(self):
        path = self.write(tool.stack())
        usual = self.run_tool('bands', '--json', path, '--points', '1').stdout
        for option in ('--count=2', '--points=3', '--accuracy=1e-3'):
            self.assertNotEqual(self.run_tool('bands', '--json', path, '--points', '1', option).stdout, usual)

    def test_quiet_and_verbose(self):
        path = self.write(tool.stack())
        usual = self.run_tool('edges', path)
        quiet = self.run_tool('edges', '--quiet', path)
        verbose = self.run_tool('edges', '--verbose', path)
        self.assertEqual(usual.stderr + quiet.stderr, '')
        self.assertNotEqual(verbose.stderr, '')
        self.assertTrue(all(line.startswith('picket: ') for line in verbose.stderr.splitlines()))
        self.assertEqual(verbose.stdout, usual.stdout)
        self.assertNotIn('Two-dimensional', quiet.stdout)
        self.assertIn(quiet.stdout.splitlines()[0], usual.stdout)

    def test_schemas_refuse_what_is_not_in_the_contract(self):
        _, document, _ = self.ask('slab', tool.film())
        bad = tool.jsonschema.ValidationError
        for change in (lambda d: d.pop('name'), lambda d: d.update(extra=1), lambda d: d.update(command='edges'),
                       lambda d: d['results'][0]['points'][0]['modes'][0]['index'].pop('uncertainty'),
                       lambda d: d['results'][0]['points'][0]['modes'][0]['index'].update(uncertainty=None)):
            broken = tool.json.loads(tool.json.dumps(document))
            change(broken)
            with self.assertRaises(bad):
                tool.jsonschema.validate(broken, tool.schema('slab'))


if __name__ == '__main__':
    unittest.main()
