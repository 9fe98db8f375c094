"""The README shows what the tool really prints: the block under the first command is compared line by line with
a run of the example, and the C program under "In a program" is built and run."""

import os
import pathlib
import re
import subprocess
import tempfile
import unittest

SOURCE = pathlib.Path(os.environ['PICKET_SOURCE_DIR'])
BUILD = pathlib.Path(os.environ['PICKET_BUILD_DIR'])
README = (SOURCE / 'README.md').read_text(encoding='utf-8')


class Readme(unittest.TestCase):
    def test_example_output(self):
        shown = re.search(r'sh examples/run\.sh\n```.*?\n```\n(.*?)\n```', README, re.S).group(1)
        done = subprocess.run([os.environ['PICKET_TOOL'], 'edges', 'examples/bus_section.yaml'],
                              cwd=SOURCE, capture_output=True, text=True, timeout=300)
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertEqual(shown.splitlines(), done.stdout.rstrip('\n').splitlines())

    @unittest.skipIf(os.environ.get('PICKET_INSTRUMENTED'), 'a sanitizer wants to be linked first')
    def test_program(self):
        code = re.search(r'```c\n(.*?)```', README, re.S).group(1)
        includes, body = code.split('\n\n', 1)
        with tempfile.TemporaryDirectory() as folder:
            source = pathlib.Path(folder) / 'program.c'
            source.write_text(f'#include <stdio.h>\n{includes}\nint main(void) {{\n{body}\nreturn 0;\n}}\n')
            program = pathlib.Path(folder) / 'program'
            subprocess.run(['cc', '-std=c99', '-pedantic', '-Wall', '-Werror', '-I', SOURCE / 'include', source,
                            '-L', BUILD, '-lpicket', f'-Wl,-rpath,{BUILD}', '-o', program], check=True)
            done = subprocess.run([program], cwd=SOURCE, capture_output=True, text=True, timeout=300)
        self.assertRegex(done.stdout, r'^1\.\d{6} um\n$')


if __name__ == '__main__':
    unittest.main()
