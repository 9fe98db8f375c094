"""Picket: Floquet–Bloch modes and band edges of segmented optical waveguides, each number with an error bar.

    import picket

    problem = picket.Problem.from_file('examples/bus_section.yaml')
    problem['cell.pitch_nm'] = 310
    result = problem.edges(accuracy=1e-5)
    print(result['hy'].bands[0].long_um)          # a Quantity: value ± uncertainty, µm
    table = result.columns()                      # NumPy arrays; pandas.DataFrame(table) works

Lengths are nm in problems and in JSON and CSV documents, and µm in records and arrays; the suffix says which.
Failures are `PicketError` (module picket.errors), records are explained in picket.records.
"""

from ._library import PATH as library_path
from ._library import lib as _lib
from ._version import __version__
from .context import CONTINUE, STOP, Context
from .errors import (ArgumentError, BusyError, ClosedError, FileError, InputError, InternalError, MachineError,
                     MaterialRangeError, NoModeError, NumbersError, NumericError, OutOfMemory, OutputError,
                     PicketError, RequestError, Status, Stopped, UnsupportedError)
from .field import Field, SectionField
from .options import Option, options
from .problem import Problem
from .records import (Component, LogLevel, Polarization, Quantity, Question, Regime, Side, SlabPolarization,
                      Verdict)
from .result import Result, Summary


def version() -> str:
    """The version of the library in use, 'MAJOR.MINOR.PATCH'."""
    return _lib.picket_version().decode()
