"""The command line itself: what it takes, what it refuses, and how it says so."""

import unittest

import tool

COMMANDS = ('check', 'edges', 'bands', 'index', 'modes', 'slab', 'match')
LATER = ('report', 'start')


class CommandLine(tool.ToolTest):
    def test_version(self):
        for words in (['--version'], ['slab', '--version'], ['--version', 'slab', 'x']):
            with self.subTest(words):
                self.assertRegex(self.run_tool(*words).stdout, r'^picket \d+\.\d+\.\d+\n$')

    def test_help_of_the_tool(self):
        text = self.run_tool('--help').stdout
        for word in COMMANDS + ('--json', '--csv FILE', '--set KEY=VALUE', '--accuracy', '--count', '--quiet',
                                '--verbose', '130'):
            self.assertIn(word, text)
        for word in LATER:
            self.assertNotIn(f'  {word} ', text)

    def test_help_of_a_command(self):
        for command in COMMANDS:
            text = self.run_tool(command, '--help').stdout
            self.assertTrue(text.startswith(f'picket {command}: '), text)
            self.assertIn('Needs in the file: ', text)

    def test_help_says_what_is_usual_here(self):
        self.assertRegex(self.run_tool('--help').stdout, r'--jobs +N .*: 0 to 1024, usually 0')

    def test_help_comes_before_what_is_missing(self):
        self.run_tool('edges', '--help', 'no such file.yaml')

    def test_nothing(self):
        self.assert_refused(says=['no command', '--help'])

    def test_unknown_commands(self):
        self.assert_refused('edgse', 'x', says=['"edgse"', 'did you mean "edges"?'])
        self.assert_refused('slap', 'x', says=['did you mean "slab"?'])
        self.assert_refused('frobnicate', 'x', says=['"frobnicate"', '--help'])
        self.assert_refused('', 'x', says=['no command ""'])
        self.assert_refused('x' * 5000, says=['no command'])

    def test_unknown_options(self):
        self.assert_refused('edges', '--acuracy', '1e-3', 'x', says=['--acuracy', 'did you mean --accuracy?'])
        self.assert_refused('edges', '--jsno', 'x', says=['did you mean --json?'])
        self.assert_refused('edges', '--frobnicate', 'x', says=['--frobnicate', '--help'])
        self.assert_refused('edges', '-j', 'x', says=['-j', 'two dashes'])
        self.assert_refused('edges', '--' + 'y' * 5000, 'x', says=['no option'])
        self.assert_refused('edges', '--=3', 'x', says=['no option'])

    def test_what_comes_later_says_so(self):
        for command in LATER:
            self.assert_refused(command, 'x.yaml', says=[command, 'not in this version'])

    def test_missing_and_extra_words(self):
        self.assert_refused('edges', says=['problem file'])
        self.assert_refused('edges', 'a.yaml', 'b.yaml', says=['"b.yaml"', 'one file'])
        self.assert_refused('edges', 'a.yaml', '--csv', says=['--csv needs a file name'])
        self.assert_refused('edges', 'a.yaml', '--count', says=['--count needs a number'])
        self.assert_refused('edges', 'a.yaml', '--csv', '--json', says=['--csv needs'])
        self.assert_refused('edges', 'a.yaml', '--json=1', says=['--json takes no value'])
        self.assert_refused('edges', 'a.yaml', '--csv', '-', says=['--csv', 'name of a file'])
        self.assert_refused('index', 'a.yaml', '--resume', '-', says=['--resume', 'name of a file'])
        self.assert_refused('edges', 'a.yaml', '--resume', 'j', says=['--resume', 'picket index', 'picket edges'])
        self.assert_refused('edges', 'a.yaml', '--csv=', says=['--csv', 'name of a file'])
        self.assert_refused('edges', 'a.yaml', '--quiet', '--verbose', says=['--quiet', '--verbose'])

    def test_numbers_out_of_range(self):
        for text in ('0', '-1', '1e-9', '0.02', '1e', 'nan', 'inf', '0x1p-10', '1e-3x', '', ' 1e-3', '1e999', '1e-4,5'):
            self.assert_refused('edges', f'--accuracy={text}', 'x', says=['--accuracy', f'"{text}"', '1e-08 to 0.01'])
        for text in ('-1', '201', '1.5', 'many'):
            self.assert_refused('edges', f'--count={text}', 'x', says=['--count', 'whole number from 0 to 200'])
        self.assert_refused('edges', '--unknowns=10', 'x', says=['--unknowns', '1000'])
        for text in ('-1', '1025', '1.5'):
            self.assert_refused('index', f'--jobs={text}', 'x', says=['--jobs', 'whole number from 0 to 1024'])
        self.assert_refused('edges', '--points=0', 'x', says=['--points', '1 to 1000'])

    def test_malformed_sets(self):
        for text in ('cell.pitch_nm', '=3', ''):
            self.assert_refused('edges', f'--set={text}', 'x', says=['--set', 'KEY=VALUE'])

    def test_options_stand_anywhere(self):
        path = self.write(tool.film())
        first = self.run_tool('slab', '--json', '--count', '1', path).stdout
        self.assertEqual(self.run_tool('--count=1', 'slab', path, '--json').stdout, first)
        self.assertEqual(self.run_tool('--json', '--count', '1', '--', 'slab', path).stdout, first)

    def test_a_file_whose_name_looks_like_an_option(self):
        self.write(tool.film(), '--json')
        self.assertIn('guided mode', self.run_tool('slab', '--', '--json').stdout)


if __name__ == '__main__':
    unittest.main()
