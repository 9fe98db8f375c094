"""The package as it is installed by pip and by CMake, the examples on it, and the programs of the documents."""

import importlib.util
import os
import pathlib
import re
import shutil
import subprocess
import sys

import picket
import pytest
from conftest import HERE, SOURCE

EXAMPLES = sorted((SOURCE / 'examples').glob('p[0-9]_*.py'))
BUILD = os.environ.get('PICKET_BUILD_DIR')


def run(*command, **more):
    # Neither the source tree's package nor its library may help.
    environment = {name: value for name, value in os.environ.items() if name not in ('PYTHONPATH', 'PICKET_LIBRARY')}
    environment.update(more.pop('environment', {}), PYTHONDONTWRITEBYTECODE='1')
    done = subprocess.run([str(c) for c in command], capture_output=True, text=True, check=False, env=environment, **more)
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


def find_package(prefix):
    found = [path.parent.parent for path in pathlib.Path(prefix).rglob('picket/records.py')]
    if not found:
        pytest.skip('this build does not install the package')
    [only] = found
    return only


@pytest.fixture(scope='module')
def by_pip(tmp_path_factory):
    if not importlib.util.find_spec('pip') or not importlib.util.find_spec('setuptools'):
        pytest.skip('needs pip and setuptools')
    target = tmp_path_factory.mktemp('pip')
    before = sorted(p.name for p in HERE.parent.iterdir())
    run(sys.executable, '-m', 'pip', 'install', '--no-build-isolation', '--no-deps', '--no-index',
        '--disable-pip-version-check', '--target', target, HERE.parent,
        environment={'PICKET_LIBRARY': picket.library_path})
    assert sorted(p.name for p in HERE.parent.iterdir()) == before      # nothing is left in the source tree
    return target


@pytest.fixture(scope='module')
def by_cmake(tmp_path_factory):
    if not BUILD or not shutil.which('cmake'):
        pytest.skip('needs a build folder')
    prefix = tmp_path_factory.mktemp('prefix')
    run('cmake', '--install', BUILD, '--prefix', prefix)
    return find_package(prefix)


WHERE = 'import picket; print(picket.__file__); print(picket.library_path); print(picket.version())'


def test_pip(by_pip, tmp_path):
    package, library, version = run(sys.executable, '-c', WHERE, cwd=tmp_path,
                                    environment={'PYTHONPATH': str(by_pip)}).split()
    assert package.startswith(str(by_pip)) and library.startswith(str(by_pip)) and version == picket.version()
    [metadata] = by_pip.glob('picket-*.dist-info/METADATA')
    assert f'\nVersion: {picket.__version__}\n' in metadata.read_text()
    assert (by_pip / 'picket' / 'py.typed').exists()


def test_cmake(by_cmake, tmp_path):
    package, library, version = run(sys.executable, '-c', WHERE, cwd=tmp_path,
                                    environment={'PYTHONPATH': str(by_cmake)}).split()
    assert package.startswith(str(by_cmake)) and version == picket.version()
    assert pathlib.Path(library).resolve().is_relative_to(by_cmake.parents[2])
    installed = {p.name for p in (by_cmake / 'picket').iterdir()}
    assert {p.name for p in (HERE.parent / 'picket').glob('*.py')} <= installed
    assert 'py.typed' in installed and '__pycache__' not in installed


def test_there_are_examples():
    assert len(EXAMPLES) >= 4
    for path in EXAMPLES:
        assert len(path.read_text(encoding='utf-8').splitlines()) < 80, path.name


@pytest.mark.parametrize('example', EXAMPLES, ids=lambda path: path.stem)
def test_examples(by_pip, example, tmp_path):
    said = run(sys.executable, example, cwd=tmp_path, environment={'PYTHONPATH': str(by_pip), 'MPLBACKEND': 'Agg'})
    assert re.search(r'\d', said)


def test_a_library_that_is_not_there():
    failed = subprocess.run([sys.executable, '-c', 'import picket'], capture_output=True, text=True, check=False,
                            env={**os.environ, 'PYTHONPATH': str(HERE.parent), 'PICKET_LIBRARY': '/no/such.so'})
    assert failed.returncode == 1
    assert 'ImportError: the Picket library was not found' in failed.stderr and '/no/such.so' in failed.stderr


def test_another_library_is_refused():
    other = next(iter(pathlib.Path('/usr/lib').rglob('libm.so.6')), None)
    if other is None:
        pytest.skip('no other library')
    failed = subprocess.run([sys.executable, '-c', 'import picket'], capture_output=True, text=True, check=False,
                            env={**os.environ, 'PYTHONPATH': str(HERE.parent), 'PICKET_LIBRARY': str(other)})
    assert failed.returncode == 1 and 'has no picket_version' in failed.stderr


@pytest.mark.parametrize('document', ['README.md', 'bindings/python/README.md'])
def test_programs_of_the_documents(document, monkeypatch, capsys):
    monkeypatch.chdir(SOURCE)
    programs = re.findall(r'```python\n(.*?)```', (SOURCE / document).read_text(encoding='utf-8'), re.S)
    assert programs
    names = {}
    for program in programs:
        exec(compile(program, document, 'exec'), names)     # the later ones go on from the first
    assert re.search(r'\d ± \d', capsys.readouterr().out)
