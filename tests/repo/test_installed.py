"""What is installed, as its users meet it: the examples built with CMake against it, the manual page, the
completion, and that it can be taken away again."""

import os
import pathlib
import re
import shutil
import subprocess
import tempfile
import unittest

SOURCE = pathlib.Path(__file__).resolve().parents[2]
BUILD = pathlib.Path(os.environ.get('PICKET_BUILD_DIR', 'build'))
PLAIN = (BUILD / 'libpicket.so').exists() and not os.environ.get('PICKET_INSTRUMENTED')
EXAMPLE = str(SOURCE / 'examples' / 'mirror_stack.yaml')


def run(*command, **options):
    done = subprocess.run([str(c) for c in command], capture_output=True, text=True, check=False, timeout=500, **options)
    return done.returncode, done.stdout, done.stderr


def setUpModule():
    global FOLDER, PREFIX
    FOLDER = tempfile.TemporaryDirectory()
    unittest.addModuleCleanup(FOLDER.cleanup)
    PREFIX = pathlib.Path(FOLDER.name, 'prefix')
    if PLAIN:
        status, _, complaint = run('cmake', '--install', BUILD, '--prefix', PREFIX)
        assert status == 0, complaint


@unittest.skipUnless(PLAIN, 'only of a plain build')
class Examples(unittest.TestCase):
    """Also the C and C++ programs that the documents point to: under 80 lines, and they run."""

    @classmethod
    def setUpClass(cls):
        cls.build = pathlib.Path(FOLDER.name, 'examples')
        for command in (('cmake', '-S', SOURCE / 'examples', '-B', cls.build, f'-DCMAKE_PREFIX_PATH={PREFIX}',
                         '-DCMAKE_C_FLAGS=-pedantic -Wall -Wextra -Werror',
                         '-DCMAKE_CXX_FLAGS=-pedantic -Wall -Wextra -Werror'),
                        ('cmake', '--build', cls.build)):
            status, said, complaint = run(*command)
            assert status == 0, said + complaint

    def _run(self, name, *arguments):
        status, said, complaint = run(self.build / name, *arguments)
        self.assertEqual(status, 0, said + complaint)
        return said

    def test_they_are_short(self):
        for path in SOURCE.glob('examples/c*.c*'):
            with self.subTest(path.name):
                self.assertLess(path.read_text(encoding='utf-8').count('\n'), 80)

    def test_bands(self):
        said = self._run('c1_bands')
        # A quarter-wave stack is symmetric about its Bragg frequency to a part in 200 only, for the two films
        # differ; but its gap lies around pitch/wavelength = 462.5/1550.
        low, high = map(float, re.search(r'gap from (\S+) to (\S+)', said).groups())
        self.assertTrue(0.25 < low < 462.5 / 1550 < high < 0.35, said)
        self.assertEqual(said, self._run('c1_static') if (self.build / 'c1_static').exists() else said)

    def test_edge_and_giving_up(self):
        said = self._run('c2_edge', EXAMPLE)
        self.assertRegex(said, r'100 % of .*\n(.*\n)*ey: stop band from 1\.\d{6} \+- ')
        self.assertIn('given up: stopped on request', self._run('c2_edge', EXAMPLE, 2))

    def test_index_in_cxx(self):
        said = self._run('c3_index', EXAMPLE)
        self.assertEqual(len(said.splitlines()), 9)
        status, _, complaint = run(self.build / 'c3_index', '/nonexistent.yaml')
        self.assertEqual(status, 1)
        self.assertIn('PICKET_ERROR_FILE: ', complaint)

    def test_updates_change_nothing(self):
        self.assertIn('answers the same', self._run('c4_update'))


@unittest.skipUnless(PLAIN and (BUILD / 'picket').exists(), 'only of a plain build with the tool')
class Pages(unittest.TestCase):
    def setUp(self):
        self.page = (PREFIX / 'share/man/man1/picket.1').read_text(encoding='utf-8')
        self.completion = PREFIX / 'share/bash-completion/completions/picket'
        help_text = run(BUILD / 'picket', '--help')[1]
        self.options = set(re.findall(r'^  (--[a-z-]+)', help_text, re.M)) | {'--gaussian-um'}
        self.commands = set(re.findall(r'^  ([a-z]+) ', help_text, re.M))

    def test_the_manual_page_has_every_command_and_option(self):
        self.assertGreater(len(self.commands), 6)
        for word in self.commands | self.options:
            self.assertRegex(self.page, r'\n\.B "?' + re.escape(word.replace('-', r'\-')) + r'\b')

    @unittest.skipUnless(shutil.which('groff'), 'needs groff')
    def test_the_manual_page_is_well_formed(self):
        status, said, complaint = run('groff', '-man', '-Tascii', '-ww', PREFIX / 'share/man/man1/picket.1')
        self.assertEqual((status, complaint), (0, ''))
        self.assertIn('SEE ALSO', re.sub('.\b', '', said))

    def _complete(self, *words):
        script = (f'source {self.completion}; COMP_WORDS=({" ".join(words)}); COMP_CWORD={len(words) - 1}; '
                  '_picket; printf "%s\\n" "${COMPREPLY[@]}"')
        status, said, complaint = run('bash', '-c', script, cwd=SOURCE / 'examples')
        self.assertEqual((status, complaint), (0, ''))
        return set(said.split())

    @unittest.skipUnless(shutil.which('bash'), 'needs bash')
    def test_completion(self):
        self.assertEqual(self._complete('picket', "''"), self.commands)
        self.assertEqual(self._complete('picket', 'ed'), {'edges'})
        self.assertLessEqual(self.options, self._complete('picket', 'edges', '--'))
        self.assertEqual(self._complete('picket', 'edges', 'mirror'), {'mirror_stack.yaml'})
        self.assertEqual(self._complete('picket', 'edges', '--accuracy', "''"), set())
        self.assertIn('run.sh', self._complete('picket', 'edges', '--csv', 'run'))


@unittest.skipUnless(PLAIN, 'only of a plain build')
class Uninstall(unittest.TestCase):
    def test_nothing_is_left(self):
        with tempfile.TemporaryDirectory() as folder:
            # Its own manifest, so that tests at the same time do not write the one of the build.
            status, said, complaint = run('cmake', '--install', BUILD, '--prefix', f'{folder}/there')
            self.assertEqual(status, 0, complaint)
            files = re.findall(r'^-- (?:Installing|Up-to-date): (.*)$', said, re.M)
            manifest = pathlib.Path(folder, 'manifest.txt')
            manifest.write_text('\n'.join(f for f in files if not pathlib.Path(f).is_dir()) + '\n', encoding='utf-8')
            stranger = pathlib.Path(folder, 'there/include/of_another.h')
            stranger.write_text('', encoding='utf-8')
            script = SOURCE / 'src' / 'uninstall.cmake'
            status, _, complaint = run('cmake', f'-DMANIFEST={manifest}', '-P', script)
            self.assertEqual(status, 0, complaint)
            there = pathlib.Path(folder, 'there')
            self.assertEqual([p for p in there.rglob('*') if not p.is_dir()], [stranger])
            self.assertEqual([p for p in there.rglob('*picket*') if p.parent.name not in ('doc',)], [])
            self.assertNotEqual(run('cmake', f'-DMANIFEST={folder}/gone.txt', '-P', script)[0], 0)


if __name__ == '__main__':
    unittest.main()
