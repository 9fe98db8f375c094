"""Problem files as the tool meets them: where messages point, standard input, --set, odd names."""

import json
import unittest

import tool


class Files(tool.ToolTest):
    def test_messages_point_into_the_file(self):
        path = self.write(tool.film().replace('thickness_nm: 220', 'thicknes_nm: 220'))
        self.assertRegex(self.assert_refused('slab', path, says=['thicknes_nm', 'thickness_nm']),
                         r'^picket: \S+problem\.yaml:8:\d+: ')

    def test_files_that_cannot_be_read(self):
        self.assert_refused('slab', 'gone.yaml', says=['gone.yaml', 'no such file'])
        self.assert_refused('slab', str(self.folder), says=['folder'])
        self.assert_refused('slab', '', says=['path is empty'])

    def test_files_that_are_no_problems(self):
        for name, text in (('empty', ''), ('list', '- 1\n'), ('open', 'a: [1\n'), ('format', 'format: 2\n'),
                           ('key', 'format: 1\nshape: 3\n'), ('tab', 'format: 1\n\tname: x\n')):
            with self.subTest(name):
                self.assert_refused('check', self.write(text), says=['problem.yaml'])
        path = self.folder / 'binary.yaml'
        path.write_bytes(b'format: 1\nname: \xff\xfe\n')
        self.assert_refused('check', str(path), says=['binary.yaml:2:'])

    def test_what_a_command_needs(self):
        bare = self.write('format: 1\n')
        self.run_tool('check', bare)
        self.assert_refused('edges', bare, says=['cell'])
        self.assert_refused('bands', bare, says=['cell'])
        self.assert_refused('slab', bare, says=['slab'])

    def test_materials_out_of_range(self):
        path = self.write(tool.film().replace('fill: core', 'fill: silicon').replace('[1500, 1550]', '633'))
        self.assert_refused('slab', path, says=['silicon', '633', '1200'])
        self.assert_refused('check', path, says=['silicon', '633', '1200'])


class StandardInput(tool.ToolTest):
    def test_the_same_as_a_file(self):
        path = self.write(tool.film())
        self.assertEqual(self.run_tool('slab', '--json', '-', text=tool.film()).stdout,
                         self.run_tool('slab', '--json', path).stdout)

    def test_messages_name_it(self):
        self.assertRegex(self.assert_refused('check', '-', text='format: 1\nnam: x\n', says=['nam']),
                         r'^picket: standard input:2:1: ')

    def test_empty_and_too_long(self):
        self.assert_refused('check', '-', text='', says=['standard input'])
        self.assert_refused('check', '-', text='# ' + 'x' * 4000000 + '\n', says=['4000000'])

    def test_larger_than_a_pipe(self):
        comment = ''.join(f'# line {i}\n' for i in range(30000))
        self.run_tool('check', '-', text=comment + tool.film())


class Sets(tool.ToolTest):
    def index(self, *words):
        done = self.run_tool('slab', '--json', *words, self.write(tool.film()))
        return tool.document(done.stdout, 'slab')['results'][0]['points'][-1]['modes'][0]['index']['value']

    def test_a_value(self):
        # Closed-form roots of the 220 and 300 nm films at 1550 nm, ten digits.
        self.assertAlmostEqual(self.index(), 2.8477822434, delta=1e-10)
        self.assertAlmostEqual(self.index('--set', 'slab.films.0.thickness_nm=300'), 3.0491613392, delta=1e-10)

    def test_the_last_of_several_counts(self):
        self.assertAlmostEqual(self.index('--set', 'slab.films.0.thickness_nm=90',
                                          '--set=slab.films.0.thickness_nm=300'), 3.0491613392, delta=1e-10)

    def test_a_block_and_a_new_material(self):
        self.assertAlmostEqual(self.index('--set', 'materials.air={constant: {index: 1}}',
                                          '--set', 'slab.cover=air'), 2.8308824381, delta=1e-10)

    def test_an_equals_sign_in_the_value(self):
        done = self.run_tool('slab', '--json', '--set', 'name="a=b"', self.write(tool.film()))
        self.assertEqual(json.loads(done.stdout)['name'], 'a=b')

    def test_wrong_ones_are_named(self):
        path = self.write(tool.film())
        self.assert_refused('slab', path, '--set', 'slab.films.0.thickness_nm=-3', says=['set slab.films.0.thickness_nm', '-3'])
        self.assert_refused('slab', path, '--set', 'slab.film=3', says=['set slab.film', 'films'])
        self.assert_refused('slab', path, '--set', 'slab.films.0.thickness_nm.x=3', says=['thickness_nm'])
        self.assert_refused('slab', path, '--set', 'name=[1', says=['set name'])
        self.assert_refused('slab', path, '--set', 'a..b=1', says=['a..b'])


class OddNames(tool.ToolTest):
    NAMES = ['quote " and \\ backslash', 'two\nlines', "'; --json", '{"picket": 1}', '%s%n%d', '=1+1', 'Γ–µ 漢字', '</script>',
             'x' * 200]

    def test_names_survive_json(self):
        for name in self.NAMES:
            with self.subTest(name):
                done = self.run_tool('slab', '--json', '-', text=tool.film(name))
                self.assertEqual(tool.document(done.stdout, 'slab')['name'], name)

    def test_names_of_materials_survive_check(self):
        for name in ('odd, "name"', 'a.b', '%s%n', 'Γ'):
            with self.subTest(name):
                text = f'format: 1\nmaterials: {{{json.dumps(name)}: {{constant: {{index: 2}}}}}}\n'
                items = tool.document(self.run_tool('check', '--json', '-', text=text).stdout, 'check')['results']
                self.assertIn(f'materials.{name}.source', [item['name'] for item in items])
                self.assertIn(name, self.run_tool('check', '-', text=text).stdout)

    def test_percent_signs_in_file_names(self):
        self.assert_refused('check', '%s%n.yaml', says=['%s%n.yaml'])


if __name__ == '__main__':
    unittest.main()
