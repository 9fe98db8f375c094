"""The walls stand in this tree, and the checker finds every kind of hole in small bad trees."""

import pathlib
import tempfile
import unittest

import c_source
import walls

ROOT = pathlib.Path(__file__).resolve().parents[2]

GOOD_TREE = {
    'include/picket/status.h': '#define PICKET_OK 0\n',
    'src/base/memory.h': 'void *pk_alloc(unsigned long bytes);\n',
    'src/base/memory.c': '#include <stdlib.h>\n#include "base/memory.h"\n'
                         'void *pk_alloc(unsigned long bytes) {\n  return malloc(bytes);\n}\n',
    'src/dense/dense.h': '#include "base/memory.h"\n',
    'src/dense/lapack.c': '#include "dense/dense.h"\nvoid zgeev_(void);\n',
    'src/eigen/arpack.c': 'void znaupd_(void);\n/* calls malloc( in words only */\n',
    'src/io/read.c': '#include <yaml.h>\n',
    'src/cli/main.c': '#include <stdio.h>\n#include <picket/status.h>\n#include "cli/command.h"\n',
    'src/cli/command.h': '\n',
}


def _faults(changes):
    with tempfile.TemporaryDirectory() as folder:
        for name, text in {**GOOD_TREE, **changes}.items():
            path = pathlib.Path(folder, name)
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_text(text, encoding='utf-8')
        return walls.check(folder)


# What is wrong, the file that holds it, and words of the sentence that must come.
BAD_FILES = (
    ('a room that includes a later one', 'src/base/x.c', '#include "dense/dense.h"\n', 'comes after'),
    ('a room that includes the tool', 'src/io/x.c', '#include "cli/command.h"\n', 'comes after'),
    ('a way around through the parent', 'src/dense/x.c', '#include "../base/memory.h"\n', 'room/file.h'),
    ('a quoted name without its room', 'src/base/x.c', '#include "memory.h"\n', 'room/file.h'),
    ('a file that is not there', 'src/base/x.c', '#include "base/gone.h"\n', 'does not exist'),
    ('a tool that looks inside', 'src/cli/x.c', '#include "base/memory.h"\n', 'the tool sees only'),
    ('a public header that looks inside', 'include/picket/x.h', '#include "base/memory.h"\n',
     'a public header'),
    ('an unknown room', 'src/cellar/x.c', '\n', 'no room'),
    ('UMFPACK outside its file', 'src/eigen/x.c', '#include <umfpack.h>\n', 'uses UMFPACK'),
    ('UMFPACK by another path', 'src/eigen/x.c', '#include <suitesparse/umfpack.h>\n', 'uses UMFPACK'),
    ('CHOLMOD outside its file', 'src/sparse/x.c', '#include <cholmod.h>\n', 'uses CHOLMOD'),
    ('ARPACK outside its file', 'src/eigen/x.c', 'void dsaupd_(void);\n', 'uses ARPACK'),
    ('LAPACK outside its file', 'src/eigen/arpack.c', 'void zgesv_(void);\n', 'uses LAPACK'),
    ('BLAS by its header', 'src/sparse/x.c', '#include <cblas.h>\n', 'uses LAPACK/BLAS'),
    ('YAML outside io', 'src/study/x.c', '#include <yaml.h>\n', 'uses libyaml'),
    ('a second file with YAML', 'src/io/x.c', '#include <yaml.h>\n', 'called from 2 files'),
    ('Jansson outside io', 'src/cli/x.c', '#include <jansson.h>\n', 'uses Jansson'),
    ('third-party types in a public header', 'include/picket/x.h', '#include <jansson.h>\n',
     'uses Jansson'),
    ('an unknown library', 'src/io/x.c', '#include <curl/curl.h>\n', 'neither standard'),
    ('malloc', 'src/io/x.c', 'void *f(void) {\n  return malloc(1);\n}\n', 'x.c:2: malloc is for'),
    ('free', 'src/io/x.c', 'void f(void *p) {\n  free(p);\n}\n', 'x.c:2: free is for'),
    ('free handed on', 'src/io/x.c', 'void f(void *p) { use(p, free); }\n', 'free is for'),
    ('printf', 'src/io/x.c', 'void f(void) { printf("x"); }\n', 'printing'),
    ('fprintf to stdout', 'src/io/x.c', 'void f(void) { fprintf(stdout, "x"); }\n', 'printing'),
    ('exit', 'src/io/x.c', 'void f(void) { exit(1); }\n', 'ending the program'),
    ('getenv', 'src/io/x.c', 'void f(void) { getenv("x"); }\n', 'reading the environment'),
    ('signal', 'src/io/x.c', 'void f(void) { signal(2, 0); }\n', 'catching signals'),
    ('fork', 'src/study/x.c', 'int f(void) { return fork(); }\n', 'other processes'),
    ('kill', 'src/io/x.c', 'void f(void) { kill(1, 9); }\n', 'other processes'),
    ('catching signals even where there are workers', 'src/study/workers.c', 'void f(void) { signal(2, 0); }\n',
     'catching signals'),
    ('a public macro without the prefix', 'include/picket/x.h', '#define LIMIT 3\n', 'lacks the prefix'),
    ('a long function', 'src/io/x.c', 'int f(void) {\n' + '  g();\n' * 99 + '}\n', 'f has 101 lines'),
    ('a long function of a test', 'tests/unit/io/test_x.c', 'int f(void) {\n' + '  g();\n' * 99 + '}\n',
     'f has 101 lines'),
    ('a long function in extern "C"', 'src/io/x.h',
     'extern "C" {\nint f(void) {\n' + '  g();\n' * 99 + '}\n}\n', 'f has 101 lines'),
    ('a long file', 'src/io/x.c', '\n' * 501, 'has 501 lines'),
)

# Looks like one of the above and is allowed.
GOOD_FILES = (
    ('memory by another name', 'src/io/x.c', 'void f(o *p) { p->free(p); pk_free(p); p->x.free(p); }\n'),
    ('forbidden words in comments and texts', 'src/io/x.c', '/* printf( */ // exit(\nchar *s = "free(p)";\n'),
    ('a name that ends like a Fortran routine', 'src/io/x.c', 'void f(o *p) { int complex_ = p->real_(2); }\n'),
    ('printing into a text', 'src/io/x.c', 'void f(char *s) { snprintf(s, 1, "x"); }\n'),
    ('worker processes', 'src/study/workers.c', 'void f(void) { if (fork() == 0) _exit(kill(1, 9)); }\n'),
    ('an earlier room', 'src/api/x.c', '#include "io/x.h"\n#include <math.h>\n#include <picket/status.h>\n'),
    ('a tool that prints and allocates', 'src/cli/x.c', 'void f(void) { printf("x"); exit(free(malloc(1))); }\n'),
    ('a function of 100 lines', 'src/io/x.c', 'int f(void) {\n' + '  g();\n' * 98 + '}\n'),
    ('a table of 200 lines', 'src/io/x.c', 'int t[] = {\n' + '  1,\n' * 198 + '};\n'),
)


class Walls(unittest.TestCase):
    def test_this_tree(self):
        self.assertEqual(walls.check(ROOT), [])

    def test_the_good_tree(self):
        self.assertEqual(_faults({}), [])

    def test_every_hole_is_found(self):
        for what, name, text, sentence in BAD_FILES:
            with self.subTest(what):
                faults = _faults({name: text})
                self.assertTrue(any(sentence in fault for fault in faults), faults)
                self.assertTrue(all(pathlib.PurePath(name).name in fault for fault in faults), faults)

    def test_nothing_else_is_found(self):
        for what, name, text in GOOD_FILES:
            with self.subTest(what):
                self.assertEqual(_faults({'src/io/x.h': '\n', name: text}), [])

    def test_every_room_of_the_tree_is_seen(self):
        rooms = {path.name for path in (ROOT / 'src').iterdir() if path.is_dir() and any(path.glob('*.c'))}
        self.assertLessEqual(rooms, set(walls.ROOMS) | {walls.TOOL})
        self.assertIn('base', rooms)


class Source(unittest.TestCase):
    def test_functions_are_measured(self):
        text = ('#include <a.h>\n#define M(x) {x}\nstruct s {\n  int a;\n};\n'
                'static int table[2] = {1,\n 2};\n'
                'int\nf(int a,\n  int b) {\n  if (a) {\n  }\n  /* } */\n  return \'}\';\n}\n'
                'void g(void) {}\n')
        self.assertEqual(c_source.functions(text), [('f', 8, 15), ('g', 16, 16)])


if __name__ == '__main__':
    unittest.main()
