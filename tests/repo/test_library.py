"""The libraries as they leave the build: exported names, installed files, a program linked to them."""

import os
import pathlib
import subprocess
import tempfile
import unittest

BUILD = pathlib.Path(os.environ.get('PICKET_BUILD_DIR', 'build'))
# Sanitizers and coverage put names of their own into the library, and a program linked to it from
# outside the build would need them too.
PLAIN = (BUILD / 'libpicket.so').exists() and not os.environ.get('PICKET_INSTRUMENTED')

PROGRAM = '''
#include <picket/context.h>
int main(void) {
  picket_context *context = 0;
  picket_status status = picket_context_create(0, &context);
  picket_context_free(context);
  return status == PICKET_OK ? 0 : 1;
}
'''


def _run(*command, **options):
    return subprocess.run(command, capture_output=True, text=True, check=False, **options)


def _strangers(library):
    """Exported names without the prefix, and how many have it. Those of the linker begin with an
    underscore."""
    listed = _run('nm', '-D', '--defined-only', '--format=posix', str(library))
    names = [line.split()[0] for line in listed.stdout.splitlines()]
    ours = [name for name in names if name.startswith('picket_')]
    return [n for n in names if n not in ours and not n.startswith('_')], len(ours)


class ExportedNames(unittest.TestCase):
    @unittest.skipUnless(PLAIN, 'only of a plain build')
    def test_all_have_the_prefix(self):
        strangers, ours = _strangers(BUILD / 'libpicket.so')
        self.assertEqual(strangers, [])
        self.assertGreater(ours, 0)

    def test_a_stranger_is_found(self):
        with tempfile.TemporaryDirectory() as folder:
            source = pathlib.Path(folder, 'bad.c')
            source.write_text('int picket_fine(void) { return 1; }\nint pk_leaked(void) { return 2; }\n',
                              encoding='utf-8')
            made = _run('gcc', '-shared', '-fPIC', str(source), '-o', f'{folder}/bad.so')
            self.assertEqual(made.returncode, 0, made.stderr)
            self.assertEqual(_strangers(f'{folder}/bad.so'), (['pk_leaked'], 1))


@unittest.skipUnless(PLAIN, 'only of a plain build')
class Installed(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.folder = tempfile.TemporaryDirectory()
        cls.addClassCleanup(cls.folder.cleanup)
        cls.prefix = pathlib.Path(cls.folder.name, 'prefix')
        # The prefix is written into picket.pc when configuring, so it is handed to pkg-config below.
        cls.done = _run('cmake', '--install', str(BUILD), '--prefix', str(cls.prefix))
        cls.library = next((p.parent for p in cls.prefix.rglob('libpicket.a')), cls.prefix)
        pathlib.Path(cls.folder.name, 'user.c').write_text(PROGRAM, encoding='utf-8')

    def _flags(self, *wanted):
        environment = {**os.environ, 'PKG_CONFIG_PATH': str(self.library / 'pkgconfig')}
        found = _run('pkg-config', f'--define-variable=prefix={self.prefix}', *wanted, 'picket',
                     env=environment)
        self.assertEqual(found.returncode, 0, found.stderr)
        return found.stdout.split()

    def _build_and_run(self, *link):
        program = f'{self.folder.name}/user'
        built = _run('gcc', f'{self.folder.name}/user.c', *self._flags('--cflags'), '-o', program, *link)
        self.assertEqual(built.returncode, 0, built.stderr)
        ran = _run(program, env={**os.environ, 'LD_LIBRARY_PATH': str(self.library)})
        self.assertEqual(ran.returncode, 0, ran.stderr)

    def test_every_file_is_there(self):
        self.assertEqual(self.done.returncode, 0, self.done.stderr)
        installed = {p.relative_to(self.prefix).as_posix() for p in self.prefix.rglob('*.h')}
        self.assertIn('include/picket/context.h', installed)
        self.assertTrue(any(self.prefix.rglob('libpicket.so')))
        self.assertTrue(any(self.prefix.rglob('LICENSE')))

    def test_a_program_uses_the_shared_library(self):
        self._build_and_run(*self._flags('--libs'))

    def test_a_program_uses_the_static_library(self):
        rest = [flag for flag in self._flags('--static', '--libs') if flag != '-lpicket']
        self._build_and_run(str(self.library / 'libpicket.a'), *rest)

    @unittest.skipUnless((BUILD / 'picket').exists(), 'the tool is not built')
    def test_the_installed_tool_finds_its_library(self):
        ran = _run(str(self.prefix / 'bin' / 'picket'), '--version', env={'PATH': '/usr/bin:/bin'})
        self.assertEqual(ran.returncode, 0, ran.stderr)


if __name__ == '__main__':
    unittest.main()
