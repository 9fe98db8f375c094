"""Puts the shared library beside the package, if it is built: the one in PICKET_LIBRARY or in build/ of the source
tree. Without it the package looks for the library where the system's loader does. Everything else is said in
pyproject.toml."""

import os
import pathlib
import shutil
import tempfile

from setuptools import Distribution, setup
from setuptools.command.build_py import build_py

NAME = 'libpicket.so.0'


def library():
    """The library to take along, or None."""
    chosen = os.environ.get('PICKET_LIBRARY')
    path = pathlib.Path(chosen or pathlib.Path(__file__).resolve().parents[2] / 'build' / NAME)
    if chosen and not path.exists():
        raise SystemExit(f'PICKET_LIBRARY is {chosen}, which does not exist')
    return path if path.exists() else None


class BuildWithLibrary(build_py):
    def run(self):
        super().run()
        if library():
            shutil.copy(library(), pathlib.Path(self.build_lib, 'picket', NAME))


class Machine(Distribution):
    """A package with the library in it fits one kind of machine."""

    def has_ext_modules(self):
        return library() is not None


# What is built on the way stays out of the source tree.
scratch = tempfile.mkdtemp(prefix='picket-build-')
setup(distclass=Machine, cmdclass={'build_py': BuildWithLibrary},
      options={'build': {'build_base': scratch}, 'egg_info': {'egg_base': scratch}})
