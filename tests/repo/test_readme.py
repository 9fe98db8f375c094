"""The README shows what the tool really prints: the block under the first command is compared line by line with
a run of the example, and the C program under "In a program" is built and run."""

import json
import os
import pathlib
import re
import subprocess
import tempfile
import unittest

SOURCE = pathlib.Path(os.environ['PICKET_SOURCE_DIR'])
BUILD = pathlib.Path(os.environ['PICKET_BUILD_DIR'])
README = (SOURCE / 'README.md').read_text(encoding='utf-8')


class Readme(unittest.TestCase):
    def test_example_output(self):
        shown = re.search(r'sh examples/run\.sh\n```.*?\n```\n(.*?)\n```', README, re.S).group(1)
        done = subprocess.run([os.environ['PICKET_TOOL'], 'edges', 'examples/bus_section.yaml'],
                              cwd=SOURCE, capture_output=True, text=True, timeout=300)
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertEqual(shown.splitlines(), done.stdout.rstrip('\n').splitlines())

    @unittest.skipIf(os.environ.get('PICKET_INSTRUMENTED'), 'a sanitizer wants to be linked first')
    def test_program(self):
        code = re.search(r'```c\n(.*?)```', README, re.S).group(1)
        includes, body = code.split('\n\n', 1)
        with tempfile.TemporaryDirectory() as folder:
            source = pathlib.Path(folder) / 'program.c'
            source.write_text(f'#include <stdio.h>\n{includes}\nint main(void) {{\n{body}\nreturn 0;\n}}\n')
            program = pathlib.Path(folder) / 'program'
            subprocess.run(['cc', '-std=c99', '-pedantic', '-Wall', '-Werror', '-I', SOURCE / 'include', source,
                            '-L', BUILD, '-lpicket', f'-Wl,-rpath,{BUILD}', '-o', program], check=True)
            done = subprocess.run([program], cwd=SOURCE, capture_output=True, text=True, timeout=300)
        self.assertRegex(done.stdout, r'^1\.\d{6} um\n$')


def table_below(words):
    """The rows of the first table after these words, without its head."""
    lines = README[README.index(words):].split('\n| --- ', 1)[1].split('\n\n', 1)[0].splitlines()[1:]
    return [[cell.strip() for cell in line.strip('|').split('|')] for line in lines]


class Shortcuts(unittest.TestCase):
    """The tables that compare models: each number as printed is the rounded answer, each error the difference."""

    def ask(self, command, example, *words):
        done = subprocess.run([os.environ['PICKET_TOOL'], command, '--json', *words, f'examples/{example}.yaml'],
                              cwd=SOURCE, capture_output=True, text=True, timeout=500)
        self.assertEqual(done.returncode, 0, done.stderr)
        return json.loads(done.stdout)['results'][0]['points'][0]

    def assert_printed(self, text, quantity):
        half = 0.5 * 10.0 ** -len(text.split('.')[1])
        self.assertAlmostEqual(float(text), quantity['value'], delta=half + quantity['uncertainty'])

    def test_effective_index_method(self):
        rows = table_below('the effective index method, which takes the film first')
        full = self.ask('modes', 'wire')['modes']
        films = {'te': self.ask('slab', 'wire')['modes'],
                 'tm': self.ask('slab', 'wire', '--set', 'materials.film.slab.polarization=tm',
                                '--set', 'slab.polarization=te')['modes']}
        self.assertEqual(len(rows), len(full))
        for (kind, estimate, index, off), mode in zip(rows, full):
            named = f"{mode['polarization']}, {mode['nodes_x']} {mode['nodes_y']}"
            self.assertEqual(kind, named)
            # One film mode per width mode: its order along x is the number of nodes.
            film = films[kind[:2]][mode['nodes_x']]['index']
            self.assert_printed(estimate, film)
            self.assert_printed(index, mode['index'])
            self.assertAlmostEqual(float(off), float(estimate) - float(index), delta=1e-9)
            # Confinement in both directions at once is weaker than the method has it.
            self.assertGreater(film['value'], mode['index']['value'])

    def test_averaged_teeth(self):
        (_, averaged, off_averaged), (_, flat, off_flat), (_, direct, _) = table_below('The same wire cut into teeth')
        direct = direct.split(' ± ')
        fast = ('--accuracy', '1e-3', '--set')
        section = self.ask('modes', 'wire', '--count', '1', *fast, 'section.shapes.0.fill=teeth')['modes'][0]
        at = ('light.wavelength_nm=1550', '--set')
        cell = self.ask('index', 'bus_section', '--set', *at, 'cell.pitch_nm=200', '--set',
                        'cell.shapes.0.length_nm=100')
        tooth = 'channel.shapes.0.rect.along_nm.'
        channel = self.ask('index', 'bus_channel', *fast, *at, 'channel.pitch_nm=200', '--set', f'{tooth}0=-50',
                           '--set', f'{tooth}1=50')
        self.assert_printed(averaged, section['index'])
        self.assert_printed(flat, cell['modes'][0]['bloch_index'])
        found = channel['modes'][0]['bloch_index']
        self.assert_printed(direct[0], found)
        self.assertAlmostEqual(float(direct[1]), found['uncertainty'], delta=1e-4)
        for estimate, off in ((averaged, off_averaged), (flat, off_flat)):
            self.assertAlmostEqual(float(off), float(estimate) - float(direct[0]), delta=1e-9)


if __name__ == '__main__':
    unittest.main()
