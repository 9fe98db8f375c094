"""What lies at the top of the repository, and how the C files are laid out."""

import pathlib
import shutil
import subprocess
import tempfile
import unittest

ROOT = pathlib.Path(__file__).resolve().parents[2]

ALLOWED = {'README.md', 'DEVELOPERS.md', 'CMakeLists.txt', 'CMakePresets.json', 'CHANGELOG.md', 'LICENSE',
           'include', 'src', 'bindings', 'tests', 'benchmarks', 'examples'}

# .clang-format is written for the version of Debian 12; others lay out a few lines differently.
FORMATTER_VERSION = 14


def _strangers(names):
    return sorted(n for n in names if n not in ALLOWED and not n.startswith('.') and n != 'build'
                  and not n.startswith('build-'))


def _tracked():
    """The top-level names git knows; those in the folder when there is no git."""
    listed = subprocess.run(['git', '-C', str(ROOT), '-c', f'safe.directory={ROOT}', 'ls-files'],
                            capture_output=True, text=True, check=False) if shutil.which('git') else None
    if listed is None or listed.returncode != 0:
        return {path.name for path in ROOT.iterdir()}
    return {line.split('/')[0] for line in listed.stdout.splitlines()}


def _ill_formed(files, style):
    """What clang-format would change, or '' if nothing."""
    done = subprocess.run(['clang-format', '--dry-run', '-Werror', f'--style=file:{style}', *files],
                          capture_output=True, text=True, check=False)
    return done.stderr if done.returncode != 0 else ''


def _formatter_version():
    if not shutil.which('clang-format'):
        return None
    said = subprocess.run(['clang-format', '--version'], capture_output=True, text=True, check=False).stdout
    return int(said.split('version ')[1].split('.')[0])


class TopLevel(unittest.TestCase):
    def test_only_allowed_names(self):
        self.assertEqual(_strangers(_tracked()), [])

    def test_a_stranger_is_found(self):
        self.assertEqual(_strangers({'src', 'notes.txt', '.gitignore', 'build'}), ['notes.txt'])


@unittest.skipUnless(_formatter_version() == FORMATTER_VERSION, f'needs clang-format {FORMATTER_VERSION}')
class Format(unittest.TestCase):
    def test_c_files(self):
        files = [str(p) for folder in ('src', 'include', 'tests', 'benchmarks', 'examples', 'bindings')
                 for p in sorted((ROOT / folder).rglob('*')) if p.suffix in ('.c', '.h')]
        self.assertGreater(len(files), 0)
        wrong = _ill_formed(files, ROOT / '.clang-format')
        if wrong:
            self.fail('cmake --build build --target format mends:\n' + wrong)

    def test_an_ill_formed_file_is_found(self):
        with tempfile.TemporaryDirectory() as folder:
            path = pathlib.Path(folder, 'bad.c')
            path.write_text('int  f( void )\n{ return 1 ; }\n', encoding='utf-8')
            self.assertIn('bad.c', _ill_formed([str(path)], ROOT / '.clang-format'))


if __name__ == '__main__':
    unittest.main()
