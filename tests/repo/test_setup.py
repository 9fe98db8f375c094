"""The set-up scripts, with stand-ins for the commands of the system: what they would install, and
that a build folder made elsewhere is not trusted."""

import os
import pathlib
import shutil
import subprocess
import tempfile
import unittest

ROOT = pathlib.Path(__file__).resolve().parents[2]
PACKAGES = ROOT / 'tests' / 'setup' / 'packages.sh'
CONFIGURE = ROOT / 'tests' / 'setup' / 'configure.sh'

# Every call of a stand-in is a line of the file calls.txt beside it.
LOG = 'echo "$(basename "$0") $*" >>"$(dirname "$0")/calls.txt"\n'
# Says "installed" of all packages but those listed in the file missing.txt.
DPKG_QUERY = ('grep -qx "$(for last; do :; done; echo "$last")" "$(dirname "$0")/missing.txt" && '
              'echo not-installed || echo installed\n')
NEEDED = ('sh', 'grep', 'env', 'basename', 'dirname', 'cat')


class Machine:
    """A folder of commands that is the whole PATH."""

    def __init__(self, folder, missing=(), user=0, **commands):
        self.folder = pathlib.Path(folder)
        for name in NEEDED:
            os.symlink(shutil.which(name), self.folder / name)
        (self.folder / 'missing.txt').write_text(''.join(f'{name}\n' for name in missing), encoding='utf-8')
        self._stand_in('id', f'echo {user}\n')
        for name, body in commands.items():
            self._stand_in(name.replace('_', '-'), body)

    def _stand_in(self, name, body):
        path = self.folder / name
        path.write_text('#!/bin/sh\n' + body, encoding='utf-8')
        path.chmod(0o755)

    def set_up(self, *lists):
        return subprocess.run(['/bin/sh', str(PACKAGES), *lists], capture_output=True, text=True, check=False,
                              env={'PATH': str(self.folder)})

    def calls(self):
        path = self.folder / 'calls.txt'
        return path.read_text(encoding='utf-8').splitlines() if path.exists() else []


class Packages(unittest.TestCase):
    def setUp(self):
        folder = tempfile.TemporaryDirectory()
        self.addCleanup(folder.cleanup)
        self.folder = folder.name

    def test_nothing_missing_nothing_done(self):
        machine = Machine(self.folder, dpkg_query=DPKG_QUERY, apt_get=LOG)
        self.assertEqual(machine.set_up('build', 'test').returncode, 0)
        self.assertEqual(machine.calls(), [])

    def test_only_the_missing_are_installed(self):
        machine = Machine(self.folder, ['cmake', 'libyaml-dev', 'valgrind'], dpkg_query=DPKG_QUERY, apt_get=LOG)
        self.assertEqual(machine.set_up('build').returncode, 0)
        update, install = machine.calls()
        self.assertEqual(update, 'apt-get update')
        self.assertTrue(install.startswith('apt-get install -y'), install)
        self.assertEqual(install.split()[-2:], ['cmake', 'libyaml-dev'])

    def test_the_lists_differ(self):
        machine = Machine(self.folder, ['libcmocka-dev'], dpkg_query=DPKG_QUERY, apt_get=LOG)
        machine.set_up('build')
        self.assertEqual(machine.calls(), [])
        machine.set_up('test')
        self.assertEqual(len(machine.calls()), 2)

    def test_sudo_for_a_plain_user(self):
        machine = Machine(self.folder, ['cmake'], user=1000, dpkg_query=DPKG_QUERY, apt_get=LOG,
                          sudo=LOG + '"$@"\n')
        self.assertEqual(machine.set_up('build').returncode, 0)
        self.assertEqual([call.split()[0] for call in machine.calls()], ['sudo', 'apt-get'] * 2)

    def test_a_plain_user_without_sudo_is_told(self):
        machine = Machine(self.folder, ['cmake'], user=1000, dpkg_query=DPKG_QUERY, apt_get=LOG)
        done = machine.set_up('build')
        self.assertEqual(done.returncode, 1)
        self.assertIn('apt-get install cmake', done.stderr)
        self.assertEqual(machine.calls(), [])

    def test_a_failed_update_does_not_stop_the_installation(self):
        machine = Machine(self.folder, ['cmake'], dpkg_query=DPKG_QUERY,
                          apt_get=LOG + '[ "$1" != update ]\n')
        self.assertEqual(machine.set_up('build').returncode, 0)
        self.assertEqual(len(machine.calls()), 2)

    def test_a_failed_installation_is_a_failure(self):
        machine = Machine(self.folder, ['cmake'], dpkg_query=DPKG_QUERY, apt_get='[ "$1" = update ]\n')
        self.assertNotEqual(machine.set_up('build').returncode, 0)

    def test_another_system_is_told_what_is_needed(self):
        done = Machine(self.folder, apt_get=LOG).set_up('build')
        self.assertEqual(done.returncode, 0)
        self.assertIn('libsuitesparse-dev', done.stderr)

    def test_an_unknown_list(self):
        self.assertEqual(Machine(self.folder, dpkg_query=DPKG_QUERY).set_up('kitchen').returncode, 2)


class BuildFolder(unittest.TestCase):
    """configure.sh in a project of one line, so that it takes no time."""

    def setUp(self):
        folder = tempfile.TemporaryDirectory()
        self.addCleanup(folder.cleanup)
        self.project = pathlib.Path(folder.name, 'project')
        (self.project / 'tests' / 'setup').mkdir(parents=True)
        shutil.copy(CONFIGURE, self.project / 'tests' / 'setup')
        shutil.copy(ROOT / 'CMakePresets.json', self.project)
        (self.project / 'CMakeLists.txt').write_text(
            'cmake_minimum_required(VERSION 3.25)\nproject(small LANGUAGES NONE)\n', encoding='utf-8')

    @staticmethod
    def _configure(project, preset='release'):
        done = subprocess.run(['sh', str(project / 'tests' / 'setup' / 'configure.sh'), preset],
                              capture_output=True, text=True, check=False)
        assert done.returncode == 0, done.stdout + done.stderr

    def test_a_folder_of_our_own_is_kept(self):
        self._configure(self.project)
        kept = self.project / 'build' / 'object.o'
        kept.write_text('', encoding='utf-8')
        self._configure(self.project)
        self.assertTrue(kept.exists())

    def test_a_folder_of_another_checkout_is_made_afresh(self):
        self._configure(self.project)
        (self.project / 'build' / 'object.o').write_text('', encoding='utf-8')
        elsewhere = self.project.with_name('elsewhere')
        shutil.copytree(self.project, elsewhere)
        self._configure(elsewhere)
        self.assertFalse((elsewhere / 'build' / 'object.o').exists())
        cache = (elsewhere / 'build' / 'CMakeCache.txt').read_text(encoding='utf-8')
        self.assertIn(f'CMAKE_HOME_DIRECTORY:INTERNAL={elsewhere}', cache)

    def test_a_folder_of_other_tools_is_made_afresh(self):
        self._configure(self.project)
        stamp = self.project / 'build' / 'made-by.txt'
        stamp.write_text(stamp.read_text(encoding='utf-8').replace('cmake version', 'cmake version 0'),
                         encoding='utf-8')
        (self.project / 'build' / 'object.o').write_text('', encoding='utf-8')
        self._configure(self.project)
        self.assertFalse((self.project / 'build' / 'object.o').exists())

    def test_the_other_presets_live_on(self):
        self._configure(self.project)
        self._configure(self.project, 'dev')
        (self.project / 'build' / 'made-by.txt').unlink()
        self._configure(self.project)
        self.assertTrue((self.project / 'build' / 'dev' / 'CMakeCache.txt').exists())


if __name__ == '__main__':
    unittest.main()
