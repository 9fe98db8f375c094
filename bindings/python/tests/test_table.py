"""The binding's table against the headers: a C program prints how the structs lie, and names are compared."""

import ctypes
import dataclasses
import re
import shutil
import subprocess

import picket
import pytest
from conftest import SOURCE
from picket import _library, records
from picket._layout import RECORDS

INCLUDE = SOURCE / 'include'
HEADERS = {path.name: re.sub(r'/\*.*?\*/', '', path.read_text(encoding='utf-8'), flags=re.S)
           for path in sorted((INCLUDE / 'picket').glob('*.h'))}

# Headers whose every function the binding has.
BOUND = ('aim.h', 'bands.h', 'context.h', 'derivative.h', 'edges.h', 'field.h', 'index.h', 'match.h', 'modes.h', 'options.h',
         'problem.h', 'result.h', 'section_field.h', 'slab.h', 'status.h', 'summary.h', 'sweep.h', 'taper.h', 'tolerance.h', 'version.h')

ENUMERATIONS = {
    'PICKET_': (picket.Status, records.SlabPolarization, records.Verdict),
    'PICKET_COMPONENT_': (records.Component,), 'PICKET_LOG_': (records.LogLevel,),
    'PICKET_DERIVATIVE_': (records.DerivativeWay,), 'PICKET_QUESTION_': (records.Question,), 'PICKET_REGIME_': (records.Regime,), 'PICKET_SIDE_': (records.Side,),
    'PICKET_TAPER_': (records.TaperLaw, records.TaperWarning)}


def structs():
    """Every struct of the table by its name in C, with the names of its members."""
    found = {kind.c_name: kind.C for kind in RECORDS}
    found.update(picket_progress=_library.Progress, picket_context_options=_library.ContextOptions,
                 picket_option_description=_library.OptionDescription,
                 picket_sweep_request=_library.SweepRequest)
    return found


def members(text):
    """{struct: names of its members} of a header, in their order."""
    found = {}
    for name, body in re.findall(r'typedef struct (picket_\w+) \{(.*?)\n\} \1;', text, re.S):
        found[name] = []
        for declaration in body.split(';'):
            callback = re.search(r'\(\*(\w+)\)\(', declaration)
            if callback:
                found[name].append(callback.group(1))
            else:
                found[name] += [part.split()[-1].lstrip('*') for part in declaration.split(',') if part.strip()]
    return found


def test_structs_have_the_members_of_c():
    declared_members = {}
    for text in HEADERS.values():
        declared_members.update(members(text))
    for name, struct in structs().items():
        assert [member for member, _ in struct._fields_] == declared_members[name], name


@pytest.fixture(scope='module')
def measured(tmp_path_factory):
    """{struct: (size, {member: (offset, size)})} as the C compiler has it."""
    if not shutil.which('gcc'):
        pytest.skip('needs gcc')
    folder = tmp_path_factory.mktemp('table')
    lines = []
    for name, struct in structs().items():
        lines.append(f'printf("{name} . %zu 0\\n", sizeof({name}));')
        for member, _ in struct._fields_:
            lines.append(f'printf("{name} {member} %zu %zu\\n", offsetof({name}, {member}), '
                         f'sizeof((({name} *)0)->{member}));')
    (folder / 'sizes.c').write_text('#include <picket.h>\n#include <stddef.h>\n#include <stdio.h>\n'
                                    'int main(void) {\n' + '\n'.join(lines) + '\nreturn 0;\n}\n')
    made = subprocess.run(['gcc', '-std=c99', f'-I{INCLUDE}', 'sizes.c', '-o', 'sizes'], cwd=folder,
                          capture_output=True, text=True, check=False)
    assert made.returncode == 0, made.stderr
    found = {}
    for line in subprocess.run([folder / 'sizes'], capture_output=True, text=True, check=True).stdout.splitlines():
        name, member, first, second = line.split()
        if member == '.':
            found[name] = int(first), {}
        else:
            found[name][1][member] = int(first), int(second)
    return found


def test_structs_lie_as_in_c(measured):
    assert len(measured) > 20
    for name, struct in structs().items():
        size, members = measured[name]
        assert ctypes.sizeof(struct) == size, name
        for member, _ in struct._fields_:
            place = getattr(struct, member)
            assert (place.offset, place.size) == members[member], f'{name}.{member}'


def test_a_wrong_struct_is_found(measured):
    wrong = type('wrong', (ctypes.Structure,), {'_fields_': [('value', ctypes.c_double), ('note', ctypes.c_char_p),
                                                             ('uncertainty', ctypes.c_double)]})
    assert wrong.uncertainty.offset != measured['picket_quantity'][1]['uncertainty'][0]


def declared(text):
    """{function: number of arguments} of a header."""
    found = {}
    for name, arguments in re.findall(r'PICKET_EXPORT[^;(]*?\b(picket_\w+)\(([^;]*)\);', text):
        found[name] = 0 if arguments.strip() == 'void' else arguments.count(',') + 1
    return found


def test_functions_have_the_arguments_of_c():
    known = {}
    for text in HEADERS.values():
        known.update(declared(text))
    for name, (_, *arguments) in _library.FUNCTIONS.items():
        assert name in known, name
        assert len(arguments) == known[name], name


@pytest.mark.parametrize('header', BOUND)
def test_no_function_is_forgotten(header):
    names = declared(HEADERS[header])
    assert names
    assert sorted(set(names) - set(_library.FUNCTIONS)) == []


def test_enumerators_have_the_numbers_of_c():
    numbers = {name: int(number) for text in HEADERS.values()
               for name, number in re.findall(r'\b(PICKET_\w+) = (-?\d+)', text)}
    seen = set()
    for prefix, kinds in ENUMERATIONS.items():
        for kind in kinds:
            for member in kind:
                assert numbers[prefix + member.name] == member, prefix + member.name
                seen.add(prefix + member.name)
    for member in records.MatchAlong:
        assert numbers['PICKET_MATCH_ALONG_' + member.word.upper()] == member
    for member in records.Polarization:
        assert numbers['PICKET_' + member.name] == member
    statuses = {name for name in numbers if name.startswith('PICKET_ERROR_')}
    assert statuses <= seen


def test_every_member_is_explained():
    # Types and units stand in the docstrings; a record without one explains nothing.
    for kind in RECORDS:
        assert kind.__doc__ and not kind.__doc__.startswith(kind.__name__ + '('), kind
        assert all(field.name.isidentifier() for field in dataclasses.fields(kind))


def test_public_names_have_docstrings_and_types():
    for kind in (picket.Problem, picket.Result, picket.Summary, picket.Field, picket.Context):
        for name in dir(kind):
            thing = getattr(kind, name)
            if name.startswith('_') or not callable(thing) or isinstance(thing, type):
                continue
            assert thing.__doc__, f'{kind.__name__}.{name}'
            if name != 'plot':
                assert 'return' in thing.__annotations__, f'{kind.__name__}.{name}'


def test_the_version_is_that_of_the_build():
    version = re.search(r'project\(picket VERSION ([\d.]+)', (SOURCE / 'CMakeLists.txt').read_text()).group(1)
    assert picket.__version__ == picket.version() == version
