"""Status codes as exceptions.

    PicketError                      every failure of the library; `status` is its number, str() the one sentence
      RequestError                   what was asked for is wrong or unknown
        ArgumentError (ValueError)     an argument is outside its range
        InputError (ValueError)        the problem is wrong; the sentence says where
        MaterialRangeError (ValueError)  a material is not known at a wavelength or temperature
        UnsupportedError (NotImplementedError)
        ClosedError (ValueError)       the object was closed
      NumbersError                   there is no answer
        NumericError (ArithmeticError) an iteration failed
        NoModeError                    the structure has no such mode
      MachineError                   memory or files
        OutOfMemory (MemoryError)
        FileError (OSError)            a file could not be read
        OutputError (OSError)          a file could not be written
      Stopped                        the progress callable asked to stop
      BusyError                      the context is in use, by another thread or from a callable of its own
      InternalError                  a defect of the library

`partial` is the result with what was finished, or None.
"""

import enum


class Status(enum.IntEnum):
    """The numbers of include/picket/status.h."""
    OK = 0
    ERROR_ARGUMENT = -1
    ERROR_INPUT = -2
    ERROR_MEMORY = -3
    ERROR_FILE = -4
    ERROR_NUMERIC = -5
    ERROR_RANGE = -6
    ERROR_NO_MODE = -7
    ERROR_STOPPED = -8
    ERROR_BUSY = -9
    ERROR_UNSUPPORTED = -10
    ERROR_INTERNAL = -11
    ERROR_OUTPUT = -12


class PicketError(Exception):
    """A call failed. `status`: its number, None if the call was never made; `partial`: a result or None."""

    def __init__(self, message, status=None, partial=None):
        super().__init__(message)
        self.status = status
        self.partial = partial

    def __str__(self):
        return str(self.args[0])


class RequestError(PicketError):
    """What was asked for is wrong or unknown."""


class ArgumentError(RequestError, ValueError):
    """An argument is outside its range."""


class InputError(RequestError, ValueError):
    """The problem is wrong: unknown key, wrong type, value out of range."""


class MaterialRangeError(RequestError, ValueError):
    """A material was asked for outside the wavelengths or temperatures it is known for."""


class UnsupportedError(RequestError, NotImplementedError):
    """The request is understood but this version does not do it."""


class ClosedError(RequestError, ValueError):
    """The object was closed."""


class NumbersError(PicketError):
    """There is no answer."""


class NumericError(NumbersError, ArithmeticError):
    """An iteration failed or a residual was too large."""


class NoModeError(NumbersError):
    """The guide, slab or cell does not support the mode."""


class MachineError(PicketError):
    """Memory or files."""


class OutOfMemory(MachineError, MemoryError):
    """Memory ran out; everything acquired was released."""


class FileError(MachineError, OSError):
    """A file could not be read."""


class OutputError(MachineError, OSError):
    """A file could not be written."""


class Stopped(PicketError):
    """The progress callable asked to stop; `partial` holds what was finished, if anything was."""


class BusyError(PicketError):
    """The context is in use."""


class InternalError(PicketError):
    """An internal check failed: a defect of the library."""


_CLASSES = {
    Status.ERROR_ARGUMENT: ArgumentError,
    Status.ERROR_INPUT: InputError,
    Status.ERROR_MEMORY: OutOfMemory,
    Status.ERROR_FILE: FileError,
    Status.ERROR_NUMERIC: NumericError,
    Status.ERROR_RANGE: MaterialRangeError,
    Status.ERROR_NO_MODE: NoModeError,
    Status.ERROR_STOPPED: Stopped,
    Status.ERROR_BUSY: BusyError,
    Status.ERROR_UNSUPPORTED: UnsupportedError,
    Status.ERROR_INTERNAL: InternalError,
    Status.ERROR_OUTPUT: OutputError,
}


def error(status, message, partial=None):
    """The exception for a status; a number that a later library may bring is a plain PicketError."""
    kind = _CLASSES.get(status, PicketError)
    number = Status(status) if status in _CLASSES else status
    return kind(message or f'status {int(status)}', number, partial)
