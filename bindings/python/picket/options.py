"""Options of a solve. The library is asked which there are, so a new one needs no line here."""

from __future__ import annotations

import ctypes
import dataclasses
import itertools

from . import _library
from ._layout import text
from ._library import lib
from .errors import ArgumentError, Status


@dataclasses.dataclass(frozen=True)
class Option:
    """One option: its name, default, least and most value, whether only whole numbers are allowed, and a line."""
    name: str
    usual: float
    least: float
    most: float
    whole: bool
    help: str


def options() -> dict[str, Option]:
    """Every option of a solve by its name."""
    found = {}
    for i in itertools.count():
        row = lib.picket_option_at(i)
        if not row:
            return found
        r = row.contents
        found[text(r.name)] = Option(text(r.name), r.usual, r.least, r.most, bool(r.whole), text(r.help))


def packed(chosen):
    """The struct picket_options with the chosen values in it, or None for the defaults."""
    if not chosen:
        return None
    struct = ctypes.create_string_buffer(_library.OPTIONS_SIZE)
    lib.picket_options_init(struct)
    for name, value in chosen.items():
        if lib.picket_options_set(struct, str(name).encode(), float(value)) != Status.OK:
            raise _refused(name, value)
    return struct


def _refused(name, value):
    known = options()
    if name not in known:
        return ArgumentError(f'unknown option {name!r}, must be one of {", ".join(known)}', Status.ERROR_ARGUMENT)
    row = known[name]
    kind = 'a whole number from' if row.whole else 'from'
    return ArgumentError(f'{name} is {value!r}, must be {kind} {row.least:g} to {row.most:g}', Status.ERROR_ARGUMENT)
