"""What programs that are already compiled rely on: the exported names and the sizes of the public structs, held
against the record in abi.txt.

Something new is added to the record, something gone or resized needs a new PICKET_ABI (include/picket/version.h):

    PICKET_BUILD_DIR=build /usr/bin/python3 tests/repo/test_abi.py --write
"""

import ctypes
import os
import pathlib
import re
import subprocess
import sys
import unittest

HERE = pathlib.Path(__file__).resolve().parent
INCLUDE = HERE.parents[1] / 'include'
BUILD = pathlib.Path(os.environ.get('PICKET_BUILD_DIR', 'build'))
RECORD = HERE / 'abi.txt'
# A sanitizer wants to be linked first, so its library cannot be loaded here.
PLAIN = (BUILD / 'libpicket.so').exists() and not os.environ.get('PICKET_INSTRUMENTED')


def _headers():
    return {path.name: re.sub(r'/\*.*?\*/', '', path.read_text(encoding='utf-8'), flags=re.S)
            for path in sorted((INCLUDE / 'picket').glob('*.h'))}


def _declared():
    """Functions that the headers export."""
    return sorted(name for text in _headers().values()
                  for name in re.findall(r'PICKET_EXPORT[^;(]*?\b(picket_\w+)\(', text))


def _structs():
    """Structs that the headers lay open."""
    return sorted(name for text in _headers().values() for name in re.findall(r'typedef struct (picket_\w+) \{', text))


def _exported():
    listed = subprocess.run(['nm', '-D', '--defined-only', '--format=posix', BUILD / 'libpicket.so'],
                            capture_output=True, text=True, check=True).stdout
    return sorted(line.split()[0] for line in listed.splitlines() if line.startswith('picket_'))


def _library():
    library = ctypes.CDLL(str(BUILD / 'libpicket.so'))
    library.picket_struct_name.restype = ctypes.c_char_p
    library.picket_struct_size.restype = ctypes.c_size_t
    library.picket_struct_size.argtypes = [ctypes.c_char_p]
    return library


def _sizes(library):
    found, i = {}, 0
    while (name := library.picket_struct_name(i)) is not None:
        found[name.decode()], i = library.picket_struct_size(name), i + 1
    return found


def _now():
    """The record as it should be, for 64-bit machines."""
    library = _library()
    lines = [f'abi {library.picket_abi()}']
    lines += [f'function {name}' for name in _exported()]
    lines += [f'struct {name} {size}' for name, size in sorted(_sizes(library).items())]
    return lines


def _compare(record, now):
    """(what a compiled program would miss, what is not in the record yet); a new ABI number forgives."""
    gone = [] if record[0] != now[0] else sorted(set(record) - set(now))
    return gone, sorted(set(now) - set(record))


@unittest.skipUnless(PLAIN and ctypes.sizeof(ctypes.c_void_p) == 8, 'only of a plain 64-bit build')
class Abi(unittest.TestCase):
    def test_nothing_is_gone(self):
        gone, fresh = _compare(RECORD.read_text(encoding='utf-8').splitlines(), _now())
        self.assertEqual(gone, [], 'compiled programs rely on these: see the head of this file')
        self.assertEqual(fresh, [], 'new: add them with test_abi.py --write')

    def test_what_is_declared_is_exported_and_nothing_else(self):
        self.assertEqual(_declared(), _exported())

    def test_every_open_struct_tells_its_size(self):
        self.assertEqual(_structs(), sorted(_sizes(_library())), 'the list stands in src/api/api_version.c')

    def test_the_name_of_the_library_has_the_number(self):
        said = subprocess.run(['readelf', '-d', BUILD / 'libpicket.so'], capture_output=True, text=True, check=True)
        self.assertIn(f'[libpicket.so.{_library().picket_abi()}]', said.stdout)


class Comparison(unittest.TestCase):
    def test_what_is_gone_is_found(self):
        record = ['abi 1', 'function picket_a', 'struct picket_s 8']
        self.assertEqual(_compare(record, ['abi 1', 'struct picket_s 8']), (['function picket_a'], []))
        self.assertEqual(_compare(record, ['abi 1', 'function picket_a', 'struct picket_s 16']),
                         (['struct picket_s 8'], ['struct picket_s 16']))
        self.assertEqual(_compare(record, ['abi 2', 'function picket_a'])[0], [])


if __name__ == '__main__':
    if sys.argv[1:] == ['--write']:
        RECORD.write_text('\n'.join(_now()) + '\n', encoding='utf-8')
    else:
        unittest.main()
