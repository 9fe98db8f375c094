"""Reading C files well enough to check them: without comments and texts, function by function."""

import re

# A comment, a text or a character, whichever starts first.
_NOT_CODE = re.compile(r'//[^\n]*|/\*.*?\*/|"(?:\\.|[^"\\\n])*"|\'(?:\\.|[^\'\\\n])*\'', re.DOTALL)
_INCLUDE = re.compile(r'^[ \t]*#[ \t]*include[ \t]*([<"])([^>"]+)[>"]', re.MULTILINE)
_DIRECTIVE = re.compile(r'^[ \t]*#(?:[^\n\\]|\\.|\\\n)*', re.MULTILINE)


def _blank(match):
    """The same number of lines, so that line numbers stay true."""
    return ' ' + '\n' * match.group(0).count('\n')


def without_comments(text):
    def comments_only(match):
        return _blank(match) if match.group(0).startswith('/') else match.group(0)
    return _NOT_CODE.sub(comments_only, text)


def code_only(text):
    """The text with comments, texts and characters blanked."""
    return _NOT_CODE.sub(_blank, text)


def includes(text):
    """Pairs (line, is_quoted, name)."""
    clean = without_comments(text)
    return [(clean.count('\n', 0, m.start()) + 1, m.group(1) == '"', m.group(2))
            for m in _INCLUDE.finditer(clean)]


def words(text):
    """Triples (line, identifier, what follows on its line), outside #include lines; members, as in
    options.free or options->free, are left out."""
    clean = code_only(_INCLUDE.sub('', text))
    for number, line in enumerate(clean.split('\n'), 1):
        for m in re.finditer(r'(->|\.)?\s*\b([A-Za-z_]\w*)', line):
            if not m.group(1):
                yield number, m.group(2), line[m.end():].lstrip()


def macros(text):
    """Pairs (line, name) of everything #defined."""
    clean = without_comments(text)
    return [(clean.count('\n', 0, m.start()) + 1, m.group(1))
            for m in re.finditer(r'^[ \t]*#[ \t]*define[ \t]+(\w+)', clean, re.MULTILINE)]


def functions(text):
    """Triples (name, first line, last line) of the function definitions.

    A brace at depth zero that follows a closing parenthesis opens a function body; any other brace
    there opens a type, a table or extern "C", whose content counts as depth zero again."""
    clean = _DIRECTIVE.sub(_blank, without_comments(text))
    clean = re.sub(r'extern\s+"C"\s*\{', lambda m: ' ' * 11 + '\n' * m.group(0).count('\n'), clean)
    clean = code_only(clean)
    found, depth, head, opens_function = [], 0, 0, False
    for m in re.finditer(r'[{};]', clean):
        if m.group(0) == '{':
            if depth == 0:
                before = clean[head:m.start()]
                opens_function = before.rstrip().endswith(')') and '=' not in before
            depth += 1
            continue
        if m.group(0) == '}' and depth > 0:
            depth -= 1
            if depth == 0 and opens_function:
                found.append(_function(clean, head, m.end()))
        if depth == 0:
            head = m.end()
    return found


def _function(clean, start, end):
    start += len(clean[start:end]) - len(clean[start:end].lstrip())
    name = re.search(r'(\w+)\s*\(', clean[start:end])
    return (name.group(1) if name else '?', clean.count('\n', 0, start) + 1,
            clean.count('\n', 0, end) + 1)
