"""What the documents at the top name must be there: files, presets and rooms."""

import json
import pathlib
import re
import subprocess
import tempfile
import unittest

import walls

ROOT = pathlib.Path(__file__).resolve().parents[2]
FOLDERS = ('src/', 'include/', 'tests/', 'examples/', 'bindings/', 'benchmarks/')


def _missing(text):
    """Paths in `code` below the source folders that do not exist; `<name>` and `NAME` stand for any."""
    code = re.findall(r'`([^`\n]+)`', text)
    words = [word for piece in code for word in piece.split() if word.startswith(FOLDERS)]
    return sorted({w for w in words if not re.search(r'[<>*]|[A-Z]{4}', w) and not (ROOT / w).exists()})


class Documents(unittest.TestCase):
    def test_named_files_exist(self):
        for path in sorted(ROOT.glob('*.md')):
            with self.subTest(path.name):
                self.assertEqual(_missing(path.read_text(encoding='utf-8')), [])

    def test_a_missing_file_is_found(self):
        self.assertEqual(_missing('see `src/base/gone.c` and `src/<room>/<file>.c`'), ['src/base/gone.c'])

    def test_every_room_is_described_in_its_order(self):
        text = (ROOT / 'DEVELOPERS.md').read_text(encoding='utf-8')
        table = text[text.index('## The rooms'):text.index('## How the code is written')]
        self.assertEqual(tuple(re.findall(r'^\| `(\w+)` \|', table, re.MULTILINE)), walls.ROOMS + (walls.TOOL,))


class Versions(unittest.TestCase):
    def test_the_changelog_has_the_version_of_the_build(self):
        version = re.search(r'project\(picket VERSION ([\d.]+)', (ROOT / 'CMakeLists.txt').read_text()).group(1)
        self.assertIn(version, (ROOT / 'CHANGELOG.md').read_text(encoding='utf-8'))


class Presets(unittest.TestCase):
    def test_cmake_reads_them(self):
        with tempfile.TemporaryDirectory() as folder:
            done = subprocess.run(['cmake', '--list-presets=all', str(ROOT)], cwd=folder, capture_output=True,
                                  text=True, check=False)
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertIn('"check"', done.stdout)

    def test_every_preset_named_in_the_guide_exists(self):
        presets = json.loads((ROOT / 'CMakePresets.json').read_text(encoding='utf-8'))
        known = {p['name'] for p in presets['configurePresets'] if not p.get('hidden')}
        guide = (ROOT / 'DEVELOPERS.md').read_text(encoding='utf-8')
        row = next(line for line in guide.splitlines() if 'cmake --preset NAME' in line)
        self.assertEqual(set(re.findall(r'`([a-z]+)`', row)), known)


if __name__ == '__main__':
    unittest.main()
