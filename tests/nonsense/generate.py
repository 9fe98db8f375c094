"""Writes a C program that calls every public function with one wrong argument at a time, the others being right.

    generate.py INCLUDE_FOLDER OUTPUT.c

What is wrong depends on the type of the argument as the headers declare it: null for pointers; 0, -1 and numbers
that are too large for counts; NaN, infinities and huge numbers for doubles; empty, endless and malformed texts; sizes
that no version of a struct had. A function that returns a status must refuse what is wrong for certain, may do as it
likes with the rest, must not crash, and leaves its outputs alone unless it succeeds. New functions are found in the
headers; only what cannot be guessed from a type stands in the tables here. The objects are in harness.h.
"""

import pathlib
import re
import sys

# Arguments that may be null, and their functions; ANY stands for all.
ANY = None
NULL_ALLOWED = {(ANY, 'options'), (ANY, 'user'), (ANY, 'log'), (ANY, 'progress'), ('picket_problem_read_text', 'label'),
                ('picket_problem_text', 'path'), ('picket_problem_number_at', 'value'),
                ('picket_match_find', 'request'), ('picket_match_find', 'other')}
NULL_REFUSED = {('picket_options_set', 'options'), ('picket_options_choose', 'options')}

# Right values that a type does not tell.
GOOD = {('picket_problem_read_file', 'path'): 'e->file', ('picket_struct_size', 'name'): '"picket_quantity"',
        (ANY, 'journal_path'): '"/nonexistent/journal"', ('picket_fields_write', 'path'): '"/nonexistent/fields.h5"',
        ('picket_section_fields_write', 'path'): '"/nonexistent/fields.h5"', (ANY, 'path'): '"cell.pitch_nm"',
        (ANY, 'name'): '"count"', ('picket_problem_set', 'value'): '"200"', (ANY, 'text'): 'TEXT',
        (ANY, 'length'): 'sizeof TEXT - 1', (ANY, 'label'): '"test"', (ANY, 'wavelength_um'): '1.55',
        (ANY, 'from'): '1', (ANY, 'to'): '2', ('picket_problem_set_number', 'value'): '200', (ANY, 'value'): '1',
        (ANY, 'count'): '5', (ANY, 'capacity'): 'ROOM', ('picket_field_find', 'polarization'): 'PICKET_HY',
        ('picket_section_field_places', 'axis'): 'PICKET_AXIS_X', (ANY, 'user'): 'NULL', (ANY, 'log'): 'NULL',
        (ANY, 'progress'): 'NULL', (ANY, 'other'): 'NULL', (ANY, 'request'): '&e->{type}'}

# Structs with a size stamp besides picket_options; harness.h holds a right one and wrong ones.
STAMPED = ('picket_sweep_request', 'picket_match_request', 'picket_context_options', 'picket_figure_options')

# Long work: only what is refused before it begins is tried.
SLOW = re.compile(r'_(find|find_resumable|compare|write)$')
# Always right where it is asked: anything goes.
HARMLESS = {('picket_problem_set_number', 'value', '-1'), ('picket_problem_set_number', 'value', '0'),
            ('picket_problem_set_number', 'value', 'HUGE_VAL'), ('picket_problem_set_number', 'value', '-HUGE_VAL'),
            ('picket_problem_set_number', 'value', '1e300')}


def look_up(table, function, name, usual=None):
    return table.get((function, name), table.get((ANY, name), usual))


def listed(names, function, name):
    return (function, name) in names or (ANY, name) in names


class Argument:
    def __init__(self, text):
        kind, self.name = re.fullmatch(r'(.*?)(\w+)', text.strip(), re.S).groups()
        self.type = ' '.join(kind.split()).replace(' *', '*')
        self.base = re.sub(r'\bconst\b|\*', '', self.type).strip()
        self.depth = self.type.count('*')
        self.const = self.type.startswith('const')


class Function:
    def __init__(self, returns, name, arguments):
        self.returns = ' '.join(returns.split()).replace(' *', '*')
        self.name = name
        self.arguments = [] if arguments.strip() == 'void' else [Argument(a) for a in arguments.split(',')]


class Headers:
    def __init__(self, folder):
        text = '\n'.join(re.sub(r'/\*.*?\*/', '', p.read_text(encoding='utf-8'), flags=re.S)
                         for p in sorted(pathlib.Path(folder).glob('picket/*.h')))
        text = re.sub(r'^#.*?(?<!\\)$', '', text, flags=re.M | re.S)
        self.structs = set(re.findall(r'typedef struct (picket_\w+) \{', text))
        self.opaque = set(re.findall(r'typedef struct (picket_\w+) picket_\w+;', text))
        self.enums = set(re.findall(r'typedef enum (picket_\w+) \{', text))
        self.functions = [Function(*found) for found in
                          re.findall(r'PICKET_EXPORT\s+([^;()]*?)\b(picket_\w+)\(([^;]*?)\);', text)]


class Writer:
    def __init__(self, headers):
        self.headers, self.blocks = headers, []

    def result_of(self, function):
        """The kind of result that a function asks: picket_edges_get wants one of edges."""
        kind = re.sub(r'^picket_|_(get|count)$', '', function)
        return {'result_json': 'slab', 'result_json_get': 'slab', 'result_csv': 'slab', 'result_csv_get': 'slab',
                'edges_comparison': 'comparison', 'result_figure': 'edges', 'summary_line': 'summary', 'sweep_path': 'sweep', 'sweep_value': 'sweep'}.get(kind, kind)

    def good(self, f, a):
        """(declaration or '', expression, check that the output is untouched or '', how to let go of it)"""
        fixed = look_up(GOOD, f.name, a.name)
        v = f'v_{a.name}'
        if a.depth == 2:
            free = f'{a.base}_free({v});' if a.base in self.headers.opaque else ''
            return (f'{"const " if a.const else ""}{a.base} *{v} = SENTINEL;', f'&{v}', f'{v} == SENTINEL', free)
        if a.depth == 1 and a.base in self.headers.opaque:
            kind = f'result(e, "{self.result_of(f.name)}")' if a.base == 'picket_result' else f'e->{a.base}'
            kind = 'problem(e)' if a.base == 'picket_problem' else kind
            return '', fixed if fixed and a.name == 'other' else kind, '', ''
        if a.depth == 1 and (a.const or (a.base.endswith(('options', 'request')))) and a.base in self.headers.structs:
            if a.const:
                return '', f'&e->{a.base}', '', ''
            return f'{a.base} {v} = e->{a.base};', f'&{v}', f'same(&{v}, &e->{a.base}, sizeof {v})', ''
        if a.depth == 1 and not a.const and a.base != 'void' and a.name == 'out' and a.base == 'double':
            return 'fill(e->room, sizeof e->room[0] * 8);', 'e->room', 'filled(e->room, sizeof e->room[0] * 8)', ''
        if a.depth == 1 and not a.const and a.base != 'void':
            return f'{a.base} {v}; fill(&{v}, sizeof {v});', f'&{v}', f'filled(&{v}, sizeof {v})', ''
        if fixed is not None:
            return '', fixed, '', ''
        if a.name == 'size' and a.base == 'size_t':
            return '', f'sizeof v_{f.arguments[0].name}', '', ''
        return '', f'({a.type})0', '', ''

    def wrong(self, f, a):
        """[(expression, must be refused)]"""
        if a.depth or a.base == 'void' or a.base.endswith('_callback'):
            allowed = listed(NULL_ALLOWED, f.name, a.name) and (f.name, a.name) not in NULL_REFUSED
            found = [('NULL', not allowed)]
            if a.base == 'char' and a.depth == 1:
                found += [('""', False), ('e->endless', False), ('"\\xff\\xfe\\x01"', False), ('"..."', False)]
            if a.base == 'picket_result' and a.depth == 1:
                found += [('result(e, "summary")', f.name.endswith('_get') and not re.search('json|csv|figure', f.name)),
                          ('result(e, "edges")', False)]
            if a.base == 'picket_options' and a.const:
                found += [(f'&e->wrong_options[{i}]', True) for i in range(9)]
            if a.base in STAMPED and a.const:
                found += [(f'&e->wrong_{a.base}[{i}]', True) for i in range(4)]
            return found
        if a.base == 'double':
            return [('NAN', True)] + [(x, False) for x in ('0', '-1', '1e300', 'HUGE_VAL', '-HUGE_VAL')]
        if a.base in self.headers.enums:
            return [(f'({a.base}){x}', f.name != 'picket_context_set_log') for x in ('-1', '99', '2147483647')]
        if a.base == 'size_t':
            sure = a.name == 'capacity'
            return [('0', sure), ('1', sure), ('(size_t)-1', False)]
        return [(x, True) for x in ('-1', '-2147483647 - 1', '2147483647')]

    def block(self, f, chosen=None, expression=None, refused=None):
        """One call in braces; the wrong argument is `chosen`."""
        lines, arguments, checks, frees = [], [], [], []
        for a in f.arguments:
            declared, right, untouched, free = self.good(f, a)
            if a is chosen and (expression != 'NULL' or not declared.startswith('fill')):
                right, untouched, free = expression, '', ''
                # `size` asks how large the first argument is
                declared = declared if a is f.arguments[0] and f.name.endswith('_sized') else ''
            elif a is chosen:
                right = expression
            if a.name == 'length' and chosen and chosen.name == 'text' and expression != 'NULL':
                right = f'strlen({expression})'     # a wrong text, but no lie about it
            lines += [declared] if declared else []
            arguments.append(right)
            checks += [untouched] if untouched else []
            frees += [free] if free else []
        needs = ' && '.join(['true'] + [a for a in arguments
                                        if a.startswith(('e->picket_', 'result(', 'problem('))])
        call = f'{f.name}({", ".join(arguments)})'
        what = f'{f.name}: ' + (f'{chosen.name} is {expression}' if chosen else 'all right')
        what = what.replace('\\', '\\\\').replace('"', "'")
        untouched = ' && '.join(['true'] + checks)
        if f.returns == 'picket_status':
            expected = {None: 'RIGHT', True: 'REFUSED', False: 'EITHER'}[refused]
            body = f'picket_status status = {call}; judge(e, status, {expected}, {untouched}, "{what}");'
            if frees:
                body += ' if (status == PICKET_OK) { ' + ' '.join(frees) + ' }'
        else:
            body = f'{"" if f.returns == "void" else "(void)"}{call}; e->calls++;'
        self.blocks.append(f'  if ({needs}) {{ {" ".join(lines)} {body} }}')

    def write(self):
        for f in self.headers.functions:
            if f.name.endswith('_free'):
                self.blocks.append(f'  {f.name}(NULL);')
                continue
            slow = SLOW.search(f.name)
            if not slow:
                self.block(f)
            for a in f.arguments:
                for expression, refused in self.wrong(f, a):
                    if slow and not refused:
                        continue
                    if (f.name, a.name, expression) in HARMLESS:
                        refused = False
                    self.block(f, a, expression, refused)
        # One function for each few calls, or the compiler takes long.
        parts = [self.blocks[i:i + 40] for i in range(0, len(self.blocks), 40)]
        text = '/* Written by generate.py. */\n#include "harness.h"\n\n'
        for i, part in enumerate(parts):
            text += f'static void part_{i}(env *e) {{\n  (void)e;\n' + '\n'.join(part) + '\n}\n\n'
        text += f'void every_call(env *e) {{\n' + ''.join(f'  part_{i}(e);\n' for i in range(len(parts))) + '}\n'
        return text


if __name__ == '__main__':
    pathlib.Path(sys.argv[2]).write_text(Writer(Headers(sys.argv[1])).write(), encoding='utf-8')
