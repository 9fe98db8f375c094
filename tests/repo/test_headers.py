"""Each public header compiles alone, as C99 and as C++, and can be included from two files."""

import pathlib
import subprocess
import tempfile
import unittest

INCLUDE = pathlib.Path(__file__).resolve().parents[2] / 'include'
HEADERS = sorted(path.relative_to(INCLUDE).as_posix() for path in INCLUDE.rglob('*.h'))

STRICT = ['-pedantic', '-Wall', '-Wextra', '-Werror']
C99 = ['gcc', '-std=c99', '-Wstrict-prototypes', *STRICT]
CXX17 = ['g++', '-std=c++17', *STRICT]


def _compile(compiler, folder, name, text, *arguments):
    source = pathlib.Path(folder, name)
    source.write_text(text, encoding='utf-8')
    return subprocess.run([*compiler, f'-I{INCLUDE}', f'-I{folder}', *arguments, str(source)],
                          capture_output=True, text=True, check=False)


class PublicHeaders(unittest.TestCase):
    def setUp(self):
        self.folder = tempfile.TemporaryDirectory()
        self.addCleanup(self.folder.cleanup)

    def _alone(self, compiler, name, header):
        # Twice, so that the guard is tried too; the name makes the file more than empty.
        text = f'#include <{header}>\n#include <{header}>\nextern int picket_unused;\n'
        return _compile(compiler, self.folder.name, name, text, '-fsyntax-only')

    def test_there_are_headers(self):
        self.assertIn('picket/status.h', HEADERS)

    def test_alone_as_c99(self):
        for header in HEADERS:
            with self.subTest(header):
                done = self._alone(C99, 'alone.c', header)
                self.assertEqual(done.returncode, 0, done.stderr)

    def test_alone_as_cxx17(self):
        for header in HEADERS:
            with self.subTest(header):
                done = self._alone(CXX17, 'alone.cpp', header)
                self.assertEqual(done.returncode, 0, done.stderr)

    def _two_files(self, compiler, suffix, headers):
        includes = ''.join(f'#include <{header}>\n' for header in headers)
        first = _compile(compiler, self.folder.name, f'first.{suffix}',
                         includes + 'int other(void);\nint main(void) { return other(); }\n',
                         '-c', '-o', f'{self.folder.name}/first.o')
        second = _compile(compiler, self.folder.name, f'second.{suffix}',
                          includes + 'int other(void);\nint other(void) { return 0; }\n',
                          '-c', '-o', f'{self.folder.name}/second.o')
        self.assertEqual((first.returncode, second.returncode), (0, 0), first.stderr + second.stderr)
        return subprocess.run([compiler[0], f'{self.folder.name}/first.o', f'{self.folder.name}/second.o',
                               '-o', f'{self.folder.name}/both'], capture_output=True, text=True, check=False)

    def test_two_files_link(self):
        for compiler, suffix in ((C99, 'c'), (CXX17, 'cpp')):
            with self.subTest(suffix):
                done = self._two_files(compiler, suffix, HEADERS)
                self.assertEqual(done.returncode, 0, done.stderr)

    def test_bad_headers_are_found(self):
        bad = {'needs_another.h': 'int f(size_t n);\n',
               'not_c99.h': '#ifndef A\n#define A\nstruct s { int a; union { int b; int c; }; };\n#endif\n',
               'no_guard.h': 'struct s { int a; };\n',
               'not_cxx.h': '#ifndef A\n#define A\nint f(int class);\n#endif\n'}
        for name, text in bad.items():
            pathlib.Path(self.folder.name, name).write_text(text, encoding='utf-8')
        for name in ('needs_another.h', 'not_c99.h', 'no_guard.h'):
            with self.subTest(name):
                self.assertNotEqual(self._alone(C99, 'alone.c', name).returncode, 0)
        self.assertNotEqual(self._alone(CXX17, 'alone.cpp', 'not_cxx.h').returncode, 0)

    def test_a_definition_in_a_header_is_found(self):
        pathlib.Path(self.folder.name, 'defines.h').write_text('int value = 3;\n', encoding='utf-8')
        self.assertNotEqual(self._two_files(C99, 'c', ['defines.h']).returncode, 0)


if __name__ == '__main__':
    unittest.main()
