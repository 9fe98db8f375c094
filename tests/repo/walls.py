"""The walls of DESIGN.md as a checker: `check(root)` lists what breaks them, one sentence each.

Run by hand:  /usr/bin/python3 tests/repo/walls.py [ROOT]
"""

import pathlib
import re
import sys

import c_source

# A room includes only itself and the rooms before it.
ROOMS = ('base', 'dense', 'sparse', 'eigen', 'slab', 'material', 'geometry', 'grid', 'operator',
         'bloch', 'section', 'channel', 'study', 'io', 'api')
TOOL = 'cli'

LONGEST_FUNCTION = 100
LONGEST_FILE = 500

STANDARD_HEADERS = frozenset('''
    assert.h complex.h ctype.h errno.h float.h inttypes.h limits.h locale.h math.h setjmp.h signal.h
    stdarg.h stdatomic.h stdbool.h stddef.h stdint.h stdio.h stdlib.h stdnoreturn.h string.h
    tgmath.h time.h
    dirent.h fcntl.h poll.h pthread.h spawn.h strings.h sys/mman.h sys/resource.h sys/stat.h
    sys/time.h sys/types.h sys/wait.h unistd.h'''.split())


class Wall:
    """A library that one file may call. Its header cannot be missing where it is used, so the header
    is what is looked for; Fortran routines have none, so there their names are.

    headers   pattern of the names it is included by
    homes     pattern of the files below src/ that may use it
    words     pattern of its routines, or None
    single    True where the pattern of the homes is wide and only one of them may use it"""

    def __init__(self, name, headers, homes, words=None, single=False):
        self.name, self.single = name, single
        self.headers, self.homes = re.compile(headers), re.compile(homes)
        self.words = re.compile(words) if words else None


ARPACK_ROUTINE = r'p?[sdcz][ns]?(aupd|eupd)_(c\w*)?'

WALLS = (
    Wall('UMFPACK', r'(.*/)?(umfpack\w*|amd)\.h', r'sparse/umfpack\.c'),
    Wall('CHOLMOD', r'(.*/)?cholmod\w*\.h', r'sparse/cholmod\.c'),
    Wall('METIS', r'(.*/)?metis\.h', r'sparse/(umfpack|cholmod)\.c'),
    Wall('ARPACK', r'arpack.*', r'eigen/arpack\.c', ARPACK_ROUTINE),
    # Fortran names are all lower case and end in an underscore.
    Wall('LAPACK/BLAS', r'(.*/)?(cblas|lapacke?|f77blas|openblas_config)\w*\.h', r'dense/lapack\.c',
         rf'cblas_\w+|LAPACKE_\w+|openblas_\w+|(?!{ARPACK_ROUTINE})[a-z][a-z0-9]{{2,9}}_'),
    Wall('libyaml', r'c?yaml(/.*)?\.h', r'io/\w+\.c', single=True),
    Wall('Jansson', r'jansson\w*\.h', r'io/\w+\.c', single=True),
    Wall('HDF5', r'(.*/)?hdf5\w*\.h', r'io/\w+\.c', single=True),
    Wall('MPI', r'mpi\.h', r'study/\w+\.c', single=True),
)

# All memory comes through the context.
MEMORY = frozenset('''malloc calloc realloc free aligned_alloc posix_memalign strdup strndup getline
    getdelim asprintf vasprintf open_memstream'''.split())
MEMORY_HOMES = ('src/base/memory.c', 'src/base/context.c')

# A library neither prints nor ends the program, reads the environment or catches signals.
STREAMS = frozenset(('stdout', 'stderr'))
MANNERS = {
    'printing': frozenset('printf vprintf puts putchar perror'.split()) | STREAMS,
    'ending the program': frozenset('exit abort quick_exit atexit'.split()),
    'reading the environment': frozenset('getenv secure_getenv setenv putenv'.split()),
    'catching signals': frozenset('signal sigaction raise sigprocmask'.split()),
    'other processes': frozenset('''fork vfork posix_spawn posix_spawnp system popen execl execlp execle execv
        execvp execve wait waitpid kill _exit _Exit'''.split()),
}
# The one file that may all the same, by what it may.
MANNERS_HOMES = {'other processes': 'src/study/workers.c'}


def check(root):
    """All sentences about the tree below `root`, each starting with file:line."""
    root = pathlib.Path(root)
    found = []
    users = {wall.name: set() for wall in WALLS if wall.single}
    for path in _files(root, 'src', 'include'):
        text = path.read_text(encoding='utf-8')
        where = path.relative_to(root).as_posix()
        found += _check_includes(root, where, text)
        found += _check_words(where, text)
        found += _check_walls(where, text, users)
    for name, files in users.items():
        if len(files) > 1:
            found.append(f'{", ".join(sorted(files))}:0: {name} is called from {len(files)} files, must be one')
    for path in _files(root, 'src', 'include', 'tests', 'benchmarks', 'examples', 'bindings'):
        found += _check_size(path.relative_to(root).as_posix(), path.read_text(encoding='utf-8'))
    return found


def _files(root, *folders):
    return sorted(p for folder in folders for p in (root / folder).rglob('*') if p.suffix in ('.c', '.h'))


def _room(where):
    """The room of src/<room>/<file>; None for a public header."""
    parts = where.split('/')
    return parts[1] if parts[0] == 'src' else None


def _check_includes(root, where, text):
    room = _room(where)
    if room is not None and room not in ROOMS + (TOOL,):
        return [f'{where}:1: {room} is no room of DESIGN.md']
    found = []
    for line, quoted, name in c_source.includes(text):
        fault = _quoted_fault(root, room, name) if quoted else _angle_fault(root, room, name)
        if fault:
            found.append(f'{where}:{line}: includes {name}, {fault}')
    return found


def _quoted_fault(root, room, name):
    if room is None:
        return 'but a public header includes only <picket/...> and the standard library'
    target = name.split('/')[0]
    if '/' not in name or '..' in name or target not in ROOMS + (TOOL,):
        return 'must be written "room/file.h"'
    if not (root / 'src' / name).is_file():
        return 'which does not exist'
    if target == room:
        return None
    if room == TOOL:
        return 'but the tool sees only <picket/...> and its own headers'
    if target == TOOL or ROOMS.index(target) > ROOMS.index(room):
        return f'but {target} comes after {room}'
    return None


def _angle_fault(root, room, name):
    if name == 'picket.h' or name.startswith('picket/'):
        return None if (root / 'include' / name).is_file() else 'which does not exist'
    if name in STANDARD_HEADERS:
        return None
    if room is not None and any(wall.headers.fullmatch(name) for wall in WALLS):
        return None  # _check_walls says where it belongs
    return 'which is neither standard nor behind a wall'


def _check_walls(where, text, users):
    inside = where[len('src/'):] if where.startswith('src/') else where
    headers = [(line, name) for line, _, name in c_source.includes(text)]
    called = [(line, word) for line, word, rest in c_source.words(text) if rest.startswith('(')]
    found = []
    for wall in WALLS:
        lines = [line for line, name in headers if wall.headers.fullmatch(name)]
        lines += [line for line, word in called if wall.words and wall.words.fullmatch(word)]
        if lines and not wall.homes.fullmatch(inside):
            found.append(f'{where}:{min(lines)}: uses {wall.name}, which is behind a wall')
        elif lines and wall.single:
            users[wall.name].add(where)
    return found


def _check_words(where, text):
    room = _room(where)
    if room == TOOL:
        return []
    found = []
    for line, word, rest in c_source.words(text):
        if word in MEMORY and rest.startswith(('(', ')', ',', ';')) and where not in MEMORY_HOMES:
            found.append(f'{where}:{line}: {word} is for {" and ".join(MEMORY_HOMES)} only')
        for what, banned in MANNERS.items():
            if word in banned and (word in STREAMS or rest.startswith('(')) and where != MANNERS_HOMES.get(what):
                found.append(f'{where}:{line}: {word}: {what} is not for a library')
    if room is None:
        found += [f'{where}:{line}: the public macro {name} lacks the prefix PICKET_'
                  for line, name in c_source.macros(text) if not name.startswith(('PICKET_', 'picket_'))]
    return found


def _check_size(where, text):
    found = []
    lines = text.count('\n')
    if lines > LONGEST_FILE:
        found.append(f'{where}:1: has {lines} lines, must be at most {LONGEST_FILE}')
    for name, first, last in c_source.functions(text):
        if last - first + 1 > LONGEST_FUNCTION:
            found.append(f'{where}:{first}: {name} has {last - first + 1} lines, '
                         f'must be at most {LONGEST_FUNCTION}')
    return found


if __name__ == '__main__':
    here = pathlib.Path(__file__).resolve().parents[2]
    faults = check(sys.argv[1] if len(sys.argv) > 1 else here)
    print('\n'.join(faults) if faults else 'the walls stand')
    sys.exit(1 if faults else 0)
