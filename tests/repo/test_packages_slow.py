"""The Debian packages: made, unpacked into an empty tree, and used from there."""

import os
import pathlib
import shutil
import subprocess
import sys
import tempfile
import unittest

SOURCE = pathlib.Path(__file__).resolve().parents[2]
BUILD = pathlib.Path(os.environ.get('PICKET_BUILD_DIR', 'build'))
PLAIN = (BUILD / 'picket').exists() and not os.environ.get('PICKET_INSTRUMENTED')
EXAMPLE = SOURCE / 'examples' / 'mirror_stack.yaml'


def run(*command, **options):
    done = subprocess.run([str(c) for c in command], capture_output=True, text=True, check=False, **options)
    assert done.returncode == 0, f'{command}: {done.stdout}{done.stderr}'
    return done.stdout


@unittest.skipUnless(PLAIN and shutil.which('cpack') and shutil.which('dpkg-shlibdeps'), 'needs a plain build and dpkg-dev')
class Packages(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        folder = tempfile.TemporaryDirectory()
        cls.addClassCleanup(folder.cleanup)
        run('cpack', '-G', 'DEB', '--config', BUILD / 'CPackConfig.cmake', '-B', folder.name, cwd=folder.name)
        cls.packages = {run('dpkg-deb', '-f', p, 'Package').strip(): p for p in pathlib.Path(folder.name).glob('*.deb')}
        cls.tree = pathlib.Path(folder.name, 'tree')
        for package in cls.packages.values():
            run('dpkg-deb', '-x', package, cls.tree)

    def test_which_there_are(self):
        names = set(self.packages)
        self.assertLessEqual({'libpicket0', 'libpicket-dev', 'picket'}, names)
        depends = run('dpkg-deb', '-f', self.packages['libpicket0'], 'Depends')
        for needed in ('libc6', 'libumfpack', 'libarpack2', 'libopenblas', 'libyaml', 'libjansson', 'libhdf5'):
            self.assertIn(needed, depends)
        for name in names - {'libpicket0'}:
            self.assertIn('libpicket0 (=', run('dpkg-deb', '-f', self.packages[name], 'Depends'))

    def test_the_tool_runs(self):
        environment = {'PATH': '/usr/bin:/bin'}     # no help from anywhere else
        said = run(self.tree / 'usr/bin/picket', 'edges', '--accuracy', '1e-2', EXAMPLE, env=environment)
        self.assertIn('ey:', said)

    def test_a_program_is_built(self):
        with tempfile.TemporaryDirectory() as folder:
            environment = {**os.environ, 'PKG_CONFIG_PATH': str(self.tree / 'usr/lib/pkgconfig')}
            flags = run('pkg-config', '--cflags', '--libs', 'picket', env=environment).split()
            run('cc', '-std=c99', SOURCE / 'examples/c1_bands.c', *flags, '-o', f'{folder}/bands')
            said = run(f'{folder}/bands', env={'LD_LIBRARY_PATH': str(self.tree / 'usr/lib')})
            self.assertIn('gap from', said)

    def test_python_runs(self):
        if 'python3-picket' not in self.packages:
            self.skipTest('built without the Python package')
        environment = {'PYTHONPATH': str(self.tree / 'usr/lib/python3/dist-packages'), 'PYTHONDONTWRITEBYTECODE': '1'}
        said = run(sys.executable, '-c', 'import picket; print(picket.library_path, picket.version())', env=environment)
        path, version = said.split()
        self.assertTrue(pathlib.Path(path).resolve().is_relative_to(self.tree.resolve()), path)
        self.assertEqual(version, run('dpkg-deb', '-f', self.packages['picket'], 'Version').strip().split('-')[0])


if __name__ == '__main__':
    unittest.main()
