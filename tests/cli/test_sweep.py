"""--sweep: a question asked for several values of one number of the file."""

import csv
import json
import unittest

import tool

ROUGH = '--accuracy=1e-2'
PITCH = 'cell.pitch_nm'

WIRE = tool.MATERIALS.format(name='wire') + '''light: {wavelength_nm: 1550}
section:
  cladding: oxide
  shapes:
    - rect: {fill: core, width_nm: 450, height_nm: 220, at_nm: [0, 110]}
'''
WIDTH = 'section.shapes.0.width_nm'

# One medium between electric walls: index² = n² - (λ/2w)² of the first mode along the wider side.
BOX = tool.MATERIALS.format(name='metal box') + '''light: {wavelength_nm: [900, 1000]}
section:
  cladding: oxide
  span_nm: [1000, 600]
  shapes:
    - rect: {fill: oxide, width_nm: 500, height_nm: 300}
'''


def stack(wavelengths='[1500, 1580]', polarization='ey'):
    return tool.stack().replace('[1500, 1580]', wavelengths).replace('polarization: ey', f'polarization: {polarization}')


class Sweep(tool.ToolTest):
    def ask(self, command, path, *words, status=0):
        return tool.document(self.run_tool(command, '--json', path, *words, status=status).stdout, command)

    def rows(self, name):
        return list(csv.DictReader((self.folder / name).read_text(encoding='utf-8').splitlines()))

    def test_digits_are_those_of_separate_runs(self):
        """Each value as if it stood in the file; the last digit counts."""
        film = tool.film().replace('format: 1\n', '', 1)
        cases = [('edges', stack(polarization='both'), PITCH, [190, 200.5]),
                 ('index', stack(polarization='both'), PITCH, [190, 200.5]),
                 ('slab', 'format: 1\n' + film, 'slab.films.0.thickness_nm', [220, 400]),
                 ('modes', BOX, 'section.span_nm.0', [1000, 800]),
                 ('index', stack('1550'), 'light.wavelength_nm', [1550, 1500])]
        for command, text, path, values in cases:
            file = self.write(text)
            words = ['--sweep', f'{path}={",".join(map(str, values))}', ROUGH]
            whole = self.ask(command, file, *words, '--jobs', '1')
            self.assertEqual(self.ask(command, file, *words, '--jobs', '2'), whole)
            alone = []
            for value in values:
                for answer in self.ask(command, file, '--set', f'{path}={value}', ROUGH)['results']:
                    alone.append(answer | {'sweep': {'path': path, 'value': value}})
            self.assertEqual(whole['results'], alone)
            self.assertTrue(whole['complete'])

    def test_a_wider_wire_has_a_higher_index(self):
        """By perturbation theory: more of the higher index in the place of the lower one. The index
        stays below that of the film, the group index above the index."""
        file = self.write(WIRE)
        words = ['--sweep', f'{WIDTH}=350:600:6', '--count', '1', '--accuracy', '1e-3']
        document = self.ask('modes', file, *words, '--csv', 'w.csv')
        index = [answer['points'][0]['modes'][0]['index']['value'] for answer in document['results']]
        self.assertEqual([answer['sweep']['value'] for answer in document['results']], [350, 400, 450, 500, 550, 600])
        self.assertEqual(index, sorted(index))
        self.assertLess(index[-1], 2.8478)  # the film of 220 nm, te, from picket slab
        rows = self.rows('w.csv')
        self.assertEqual(list(rows[0])[0], WIDTH)
        self.assertEqual([float(row[WIDTH]) for row in rows], [350, 400, 450, 500, 550, 600])
        self.assertEqual([float(row['index']) for row in rows], index)
        text = self.run_tool('modes', file, *words).stdout
        self.assertIn(WIDTH, text)
        self.assertRegex(text, r'\n  550 +1550 +0 +te-like, 0 0')

    def test_both_ends_and_the_order_given(self):
        file = self.write(stack('1550'))
        for spread, values in (('200:190:3', [200, 195, 190]), ('190:200:2', [190, 200]), ('2e2', [200]),
                               ('200,190,200', [200, 190, 200])):
            document = self.ask('index', file, f'--sweep={PITCH}={spread}', ROUGH)
            self.assertEqual([answer['sweep']['value'] for answer in document['results']], values)

    def test_a_value_that_fails_is_marked(self):
        """A shape no longer fits, a slab has no thickness: the others stand."""
        cases = [('edges', stack(polarization='both'), PITCH, 80), ('index', stack(polarization='both'), PITCH, 80),
                 ('slab', tool.film(), 'slab.films.0.thickness_nm', 0), ('modes', BOX, 'section.span_nm.0', -5)]
        for command, text, path, bad in cases:
            file, good = self.write(text), {'slab': 220, 'modes': 1000}.get(command, 200)
            words = ['--sweep', f'{path}={bad},{good}', ROUGH]
            document = self.ask(command, file, *words, '--csv', 'f.csv', status=1)
            self.assertFalse(document['complete'])
            self.assertIn(f'{path} = {bad}', document['shortfall'])
            for answer in document['results']:
                failed = answer['sweep']['value'] == bad
                for piece in answer['points'] if command in ('index', 'modes') else [answer]:
                    self.assertEqual('failed' in piece, failed)
                    self.assertEqual('note' in piece, failed)
            rows = self.rows('f.csv')
            self.assertEqual({(row[path], row['failed']) for row in rows}, {(str(bad), 'true'), (str(good), 'false')})
            self.assertTrue(all(row['note'] for row in rows if row['failed'] == 'true'))
            text = self.run_tool(command, file, *words, status=1).stdout
            self.assertIn('PARTIAL RESULT', text)
            self.assertRegex(text, f'FAILED.* with {path} = {bad}: ')

    def test_if_all_fail_that_is_the_failure(self):
        file = self.write(stack())
        self.assert_refused('edges', file, '--sweep', f'{PITCH}=80,90', says=['80', 'longer than one period'][1:])
        # Below the range of the catalogue's silicon.
        text = stack().replace('fill: core', 'fill: silicon')
        self.assert_refused('index', self.write(text), '--set', 'light.wavelength_nm=1550',
                            '--sweep', 'light.wavelength_nm=200,210', says=['silicon', '200'])

    def test_nonsense_is_declined_before_the_work(self):
        file = self.write(stack())
        for word, says in ((f'{PITCH}=', 'FROM:TO:COUNT'), (PITCH, 'FROM:TO:COUNT'), ('=1:2:3', 'FROM:TO:COUNT'),
                           (f'{PITCH}=1:2', 'FROM:TO:COUNT'), (f'{PITCH}=1:2:1', '2 to 10001'),
                           (f'{PITCH}=1:2:10002', '2 to 10001'), (f'{PITCH}=1:2:3.5', '2 to 10001'),
                           (f'{PITCH}=1:1:3', 'FROM:TO:COUNT'), (f'{PITCH}=1:2:3:4', 'FROM:TO:COUNT'),
                           (f'{PITCH}=a:2:3', 'FROM:TO:COUNT'), (f'{PITCH}=nan,1', 'FROM:TO:COUNT'),
                           (f'{PITCH}=1,,2', 'FROM:TO:COUNT'), (f'{PITCH}=1,2,', 'FROM:TO:COUNT'),
                           (f'{PITCH}=0x10', 'FROM:TO:COUNT'), (f'{PITCH}=1e999', 'FROM:TO:COUNT'),
                           (f'{PITCH}=' + ','.join(['1'] * 10002), 'FROM:TO:COUNT'),
                           ('cell.pich_nm=1:2:3', 'cell.pich_nm'), ('cell.cladding=1:2:3', 'single finite number'),
                           ('cell=1:2:3', 'single finite number'), ('cell.shapes.7.at_nm=1,2', 'cell.shapes.7'),
                           ('cell..pitch_nm=1,2', 'empty piece')):
            self.assert_refused('index', file, '--sweep', word, says=[says])
        self.assert_refused('index', file, '--sweep', says=['--sweep needs'])
        self.assert_refused('index', file, '--sweep', f'{PITCH}=1,2', '--sweep', f'{PITCH}=3,4', says=['once'])
        for command in ('bands', 'check'):
            self.assert_refused(command, file, '--sweep', f'{PITCH}=1,2', says=['picket edges', command])
        self.assert_refused('index', file, '--sweep', f'{PITCH}=1,2', '--fields', 'f.h5', says=['--fields and --sweep'])
        self.assert_refused('edges', file, '--resume', 'j', says=['--resume', 'picket edges'])
        self.assert_refused('modes', file, '--sweep', f'{PITCH}=190,200', says=['section'])
        self.assertEqual([p.name for p in self.folder.iterdir()], ['problem.yaml'])

    def test_a_journal(self):
        """A second run takes everything from it, also what failed; another sweep is declined."""
        file, words = self.write(stack(polarization='both')), ['--sweep', f'{PITCH}=80,190,200', ROUGH]
        for command in ('edges', 'index'):
            journal = f'{command}.journal'
            plain = self.run_tool(command, '--json', file, *words, '--jobs', '1', status=1).stdout
            for jobs in '12':
                done = self.run_tool(command, '--json', file, *words, '--resume', journal, '--jobs', jobs, status=1)
                self.assertEqual(done.stdout, plain)
            text = (self.folder / journal).read_text(encoding='utf-8')
            self.assertEqual(text.count('\n'), 1 + {'edges': 4, 'index': 8}[command])
            # Cut in the middle of a line: that piece is solved again.
            (self.folder / journal).write_text(text[:-30], encoding='utf-8')
            done = self.run_tool(command, '--json', file, *words, '--resume', journal, status=1)
            self.assertEqual(done.stdout, plain)
            self.assert_refused(command, file, '--sweep', f'{PITCH}=80,190,201', ROUGH, '--resume', journal,
                                says=['another problem'])
        self.assert_refused('index', file, *words, '--resume', 'edges.journal', says=['another problem'])

    def test_points_that_change_with_the_value(self):
        """A sweep over the light itself: each value has its own wavelengths."""
        file = self.write(stack('{from: 1500, to: 1600, points: 2}'))
        document = self.ask('index', file, '--sweep', 'light.wavelength_nm.points=2:4:3', ROUGH)
        self.assertEqual([len(answer['points']) for answer in document['results']], [2, 3, 4])

    def test_many_values(self):
        """As many as are allowed; a film is analytic."""
        file = self.write(tool.film())
        document = self.ask('slab', file, '--set', 'light.wavelength_nm=1550', '--set', 'slab.polarization=te',
                            '--sweep', 'slab.films.0.thickness_nm=100:500:10001')
        index = [answer['points'][0]['modes'][0]['index']['value'] for answer in document['results']]
        self.assertEqual(len(index), 10001)
        self.assertEqual(index, sorted(index))
        self.assertEqual(document['results'][-1]['sweep']['value'], 500)

    def test_help_names_it(self):
        self.assertIn('--sweep PATH=FROM:TO:COUNT', self.run_tool('modes', '--help').stdout)


class ModesOverWavelengths(tool.ToolTest):
    """Processes, journals and failed points, for sections as for cells."""

    def test_jobs_and_journals_change_nothing(self):
        path, words = self.write(BOX), ['--count', '2', ROUGH]
        alone = self.run_tool('modes', '--json', path, *words, '--jobs', '1').stdout
        self.assertEqual(self.run_tool('modes', '--json', path, *words, '--jobs', '2').stdout, alone)
        for _ in range(2):
            done = self.run_tool('modes', '--json', path, *words, '--resume', 'j')
            self.assertEqual(done.stdout, alone)
        journal = self.folder / 'j'
        self.assertEqual(journal.read_bytes().count(b'\n'), 1 + 2)
        self.assert_refused('modes', path, '--resume', 'j', '--count', '3', ROUGH, says=['another problem'])

    def test_one_wavelength_that_fails(self):
        text = BOX.replace('fill: oxide', 'fill: silicon').replace('[900, 1000]', '[200, 1550]')
        path = self.write(text)
        done = self.run_tool('modes', '--json', '--csv', 't.csv', path, '--count', '1', ROUGH, status=1)
        document = tool.document(done.stdout, 'modes')
        self.assertIn('1 of 2 points', document['shortfall'])
        failed, good = document['results'][0]['points']
        self.assertEqual((failed['failed'], failed['modes']), (True, []))
        self.assertIn('silicon', failed['note'])
        self.assertEqual(len(good['modes']), 1)
        rows = list(csv.DictReader((self.folder / 't.csv').read_text(encoding='utf-8').splitlines()))
        self.assertEqual([(row['failed'], row['order']) for row in rows], [('true', ''), ('false', '0')])
        text = self.run_tool('modes', path, '--count', '1', ROUGH, status=1).stdout
        self.assertIn('FAILED at 200 nm: ', text)


if __name__ == '__main__':
    unittest.main()
