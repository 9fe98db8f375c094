"""Runs the tool for the tests of this folder."""

import json
import os
import pathlib
import subprocess
import tempfile
import unittest

import jsonschema

TOOL = os.environ['PICKET_TOOL']
SOURCE = pathlib.Path(os.environ['PICKET_SOURCE_DIR'])
INSTRUMENTED = os.environ.get('PICKET_INSTRUMENTED', '')

MATERIALS = '''format: 1
name: {name}
materials:
  core: {{constant: {{index: 3.476}}}}
  oxide: {{constant: {{index: 1.444}}}}
  silicon: {{catalogue: silicon}}
'''

# Half silicon, half oxide: the edges are known in closed form (pitch/wavelength, from the dispersion
# relation of Yeh, Yariv & Hong 1977, ten digits).
STACK = MATERIALS + '''light: {{wavelength_nm: [1500, 1580], polarization: ey}}
cell:
  pitch_nm: 200
  cladding: oxide
  lateral: uniform
  shapes:
    - stripe: {{fill: core, across: z, from_nm: -50, to_nm: 50}}
'''
STACK_EDGES = (0.15512759, 0.24209664)

FILM = MATERIALS + '''light: {{wavelength_nm: [1500, 1550]}}
slab: {{substrate: oxide, films: [{{fill: core, thickness_nm: 220}}], cover: oxide}}
'''


def stack(name='stack'):
    return STACK.format(name=json.dumps(name))


def film(name='film'):
    return FILM.format(name=json.dumps(name))


def schema(command):
    return json.loads((SOURCE / 'tests' / 'schema' / f'{command}.json').read_text(encoding='utf-8'))


def no_constant(word):
    raise AssertionError(f'{word} is not JSON')


def document(text, command):
    """The one JSON document of a text, checked against its schema."""
    value = json.loads(text, parse_constant=no_constant)
    jsonschema.validate(value, schema(command))
    return value


class ToolTest(unittest.TestCase):
    def setUp(self):
        folder = tempfile.TemporaryDirectory()
        self.addCleanup(folder.cleanup)
        self.folder = pathlib.Path(folder.name)

    def write(self, text, name='problem.yaml'):
        path = self.folder / name
        path.write_text(text, encoding='utf-8')
        return str(path)

    def run_tool(self, *words, text=None, status=0, **more):
        done = subprocess.run([TOOL, *words], input=text, capture_output=True, text=True, cwd=self.folder,
                              encoding='utf-8', check=False, timeout=300, **more)
        self.assertEqual(done.returncode, status, f'{words}\n{done.stdout}\n{done.stderr}')
        return done

    def assert_refused(self, *words, says, status=2, **more):
        """Nothing on standard output, one sentence on standard error with every word of `says`."""
        done = self.run_tool(*words, status=status, **more)
        self.assertEqual(done.stdout, '')
        self.assertTrue(done.stderr.startswith('picket: '), done.stderr)
        self.assertEqual(done.stderr.count('\n'), 1, done.stderr)
        for word in says:
            self.assertIn(word, done.stderr)
        return done.stderr
