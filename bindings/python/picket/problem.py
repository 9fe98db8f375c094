"""Problems, and the questions they are asked."""

from __future__ import annotations

import contextlib
import ctypes
import os
from collections.abc import Iterable, Mapping
from typing import Optional, Union

import numpy as np

from ._library import lib, stamped
from ._text import flow, is_number
from .context import Context, Owned, ProgressCallable
from .errors import ArgumentError, Status
from .field import Field, SectionField
from .options import packed
from .records import (AimAnswer, BandsAnswer, EdgeDerivatives, EdgesAnswer, IndexAnswer, IndexDerivatives, MatchAlong, MatchAnswer,
                      ModesAnswer, Polarization, Question, SlabAnswer, TaperAnswer, ToleranceAnswer)
from .result import Result, Summary

Path = Union[str, 'os.PathLike[str]']


class Problem(Owned):
    """Light, materials and a structure: a document of keys and values (the problem file).

        Problem({'light': {'wavelength_nm': 1550}, 'materials': {...}, 'cell': {...}})
        Problem.from_file('bus.yaml')
        Problem.from_text('format: 1\\n...')

    Values are reached by dotted paths, list elements by number, and set like this: `problem['cell.pitch_nm'] = 310`
    (`problem['cell.pitch_nm']` reads a number back).
    Lengths in a problem are nm. The whole is checked when it is first used; `check` does it now.

    The questions take keywords, all optional: those of `picket.options()`, such as accuracy (wanted relative
    uncertainty, 1e-8 to 1e-2) and count (of bands, modes or stop bands), and progress(phase, fraction), a callable
    for this call alone. They raise `picket.PicketError`. While they run, other threads go on, and Ctrl-C ends them.

    Each problem makes a context for itself unless it is given one.
    """

    _kind = 'problem'

    def __init__(self, content: Optional[Mapping] = None, *, context: Optional[Context] = None):
        """A problem from a mapping of the keys of a problem file. `format: 1` need not be in it."""
        self._begin(context, lambda c: (lib.picket_problem_create, c))
        for key, value in (content or {}).items():
            self.set(key, value)

    @classmethod
    def from_file(cls, path: Path, *, context: Optional[Context] = None) -> Problem:
        """Reads a problem file. Paths inside it are relative to its folder."""
        made = cls.__new__(cls)
        made._begin(context, lambda c: (lib.picket_problem_read_file, c, os.fsencode(path)))
        return made

    @classmethod
    def from_text(cls, content: str, *, label: Optional[str] = None, context: Optional[Context] = None) -> Problem:
        """Reads a problem from text; `label` stands for the file name in messages."""
        raw = content.encode()
        name = None if label is None else label.encode()
        made = cls.__new__(cls)
        made._begin(context, lambda c: (lib.picket_problem_read_text, c, raw, len(raw), name))
        return made

    def _begin(self, context, call):
        own = Context() if context is None else context
        pointer = own._call(*call(own._open()), wrap=lambda address: address)
        Owned.__init__(self, own, pointer, lib.picket_problem_free)

    # --- Values

    def set(self, path: str, value) -> None:
        """Sets the value at a path: a number, a text, a list, a mapping or an array. Missing blocks on the way are
        made; a list takes the element one past its end."""
        if is_number(value):
            self.context._call(lib.picket_problem_set_number, self, path.encode(), float(value))
        else:
            self.context._call(lib.picket_problem_set, self, path.encode(), flow(value).encode())

    __setitem__ = set

    def __getitem__(self, path: str) -> float:
        """The number at a path, in the unit of the file. InputError if there is none."""
        value = ctypes.c_double()
        self.context._call(lib.picket_problem_number, self, path.encode(), ctypes.byref(value))
        return value.value

    def text(self, path: Optional[str] = None) -> str:
        """What stands at a path, as `set` would take it from a file; without one the whole problem, as `from_text`
        reads it. Comments of a file are not kept."""
        out = ctypes.c_void_p()
        return self.context._call(lib.picket_problem_text, self, None if path is None else path.encode(),
                                  ctypes.byref(out), take=lambda: ctypes.string_at(out.value).decode())

    def numbers(self) -> dict[str, float]:
        """Every number of the problem by its path: what sweeps, derivatives and aims can vary."""
        path, value, found = ctypes.c_void_p(), ctypes.c_double(), {}
        with contextlib.suppress(ArgumentError):        # past the last one
            while True:
                key = self.context._call(lib.picket_problem_number_at, self, len(found), ctypes.byref(path),
                                         ctypes.byref(value), take=lambda: ctypes.string_at(path.value).decode())
                found[key] = value.value
        return found

    def check(self) -> None:
        """Raises InputError with the first fault, if there is one."""
        self.context._call(lib.picket_problem_check, self)

    # --- Questions

    def summary(self) -> Summary:
        """What was understood, with derived values: sources of the materials, duty, light lines. Nothing is solved."""
        return self.context._call(lib.picket_summary_find, self, wrap=lambda p: Summary(self.context, p))

    def _study(self, name, *before, progress=None, options, journal=None):
        """The result of picket_<name>_find(problem, *before, options, out), or of its sister with a journal."""
        call = getattr(lib, f'picket_{name}_find' if journal is None else f'picket_{name}_find_resumable')
        after = () if journal is None else (os.fsencode(journal),)
        return self.context._call(call, self, *before, packed(options), *after, progress=progress,
                                  wrap=lambda p: Result(self.context, p, name))

    def edges(self, *, progress: Optional[ProgressCallable] = None, **options: float) -> Result[EdgesAnswer]:
        """The stop bands, how far the operating band is from them, the error of the usual estimate; `count` orders
        (default 1), for each polarization of `light`."""
        return self._study('edges', progress=progress, options=options)

    def bands(self, *, progress: Optional[ProgressCallable] = None, **options: float) -> Result[BandsAnswer]:
        """ω(k) along the `path` of the problem, `points` wavenumbers per leg and `count` bands (default 6), and the
        gaps between them."""
        return self._study('bands', progress=progress, options=options)

    def index(self, *, journal: Optional[Path] = None, progress: Optional[ProgressCallable] = None,
              **options: float) -> Result[IndexAnswer]:
        """Bloch index, group index, dispersion, loss and regime at each wavelength of `light`, `count` modes
        (default 1).

        jobs     worker processes (0: as many as there are cores); the numbers do not depend on it. No other thread
                 may be inside the library meanwhile
        journal  a file that keeps every finished point; a run that was ended goes on from it

        Points that fail are marked and do not stop the rest. When the work is stopped, `partial` of the exception
        (for Ctrl-C: of its __cause__) holds the finished points."""
        return self._study('index', progress=progress, options=options, journal=journal)

    def slab(self, *, progress: Optional[ProgressCallable] = None, **options: float) -> Result[SlabAnswer]:
        """Guided modes of the `slab`, a stack of films, at each wavelength of `light`; analytic."""
        return self._study('slab', progress=progress, options=options)

    def modes(self, *, journal: Optional[Path] = None, progress: Optional[ProgressCallable] = None,
              **options: float) -> Result[ModesAnswer]:
        """Full-vector modes of the `section` at each wavelength of `light`: the first `count` by index (default: all,
        up to 20). Jobs, journal and failing points as for `index`."""
        return self._study('modes', progress=progress, options=options, journal=journal)

    def sweep(self, question: Union[Question, str], path: str, values: Iterable[float], *,
              journal: Optional[Path] = None, progress: Optional[ProgressCallable] = None,
              **options: float) -> Result:
        """Asks a question while one number of the problem takes other values; the problem itself stays as it is.

        question   'edges', 'index', 'modes' or 'slab'
        path       of a single number that the document states, e.g. 'cell.pitch_nm'
        values     in the order of the answers, at most 10001

        The result is that of the question: the answers at the first value, then those at the second, and so on.
        `values` and `path` of the result say which; its columns begin with one of the name of the path. What cannot
        be computed is marked with the reason and does not stop the rest. Jobs and journal as for `index`."""
        asked, numbers = Question.of(question), np.array(list(values), dtype=float)
        request = stamped('picket_sweep_request_init')
        request.question, request.path, request.count = asked, path.encode(), len(numbers)
        request.values = numbers.ctypes.data_as(ctypes.POINTER(ctypes.c_double))
        request.journal_path = None if journal is None else os.fsencode(journal)
        return self.context._call(lib.picket_sweep_find, self, ctypes.byref(request), packed(options),
                                  progress=progress, wrap=lambda p: Result(self.context, p, asked.word))

    def aim(self, *, progress: Optional[ProgressCallable] = None, **options: float) -> Result[AimAnswer]:
        """The value of `aim.vary` between its bounds at which `aim.quantity` meets `aim.target`, for each polarization
        of `light` or each family of modes. That there is none is an outcome: `found` is False, `reason` says why."""
        return self._study('aim', progress=progress, options=options)

    def taper(self, *, journal: Optional[Path] = None, progress: Optional[ProgressCallable] = None,
              **options: float) -> Result[TaperAnswer]:
        """A row that changes tooth by tooth, as `taper` of the problem says, for each polarization of `light`: what
        each cell is, what its mode has in common with the next one and with a fibre, and what may be wrong with it.
        Jobs and journal as for `index`."""
        return self._study('taper', progress=progress, options=options, journal=journal)

    def tolerance(self, *, journal: Optional[Path] = None, progress: Optional[ProgressCallable] = None,
                  **options: float) -> Result[ToleranceAnswer]:
        """What the spreads of `tolerance` do to the quantity it requires: sensitivities, corners, and the yield from
        seeded samples on a surrogate that is held against direct solves. Jobs and journal as for `index`."""
        return self._study('tolerance', progress=progress, options=options, journal=journal)

    def match(self, other: Optional[Problem] = None, *, gaussian_um: Union[float, tuple[float, float], None] = None,
              mode: int = 0, mode_b: int = -1, along: Union[MatchAlong, str] = MatchAlong.BEST,
              medium_index: float = 0, offset_um: Optional[tuple[float, float]] = None,
              tilt_rad: tuple[float, float] = (0, 0), progress: Optional[ProgressCallable] = None,
              **options: float) -> Result[MatchAnswer]:
        """Share of the power that goes from a mode of a second section, or a Gaussian beam, into a mode of the
        `section`, at each wavelength of `light`.

        other         a problem of the same context, or this one
        gaussian_um   instead of it: the beam's mode-field diameter, or those along x and y, µm
        mode, mode_b  orders by falling index; mode_b -1: the one of the first two that couples more
        along         E of the beam: 'x', 'y' or 'best'
        medium_index  of the medium the beam comes from, for its tilt; 0: that of the cladding
        offset_um     (x, y) of the other side, µm; None: as the files have it, and the best is sought too
        tilt_rad      the other side leans towards +x, +y"""
        request = stamped('picket_match_request_init')
        request.mode, request.mode_b, request.along = mode, mode_b, MatchAlong.of(along)
        request.medium_index = medium_index
        if gaussian_um is not None:
            request.gaussian_x_um, request.gaussian_y_um = np.broadcast_to(gaussian_um, 2)
        if offset_um is not None:
            request.offset_given, (request.offset_x_um, request.offset_y_um) = 1, offset_um
        request.tilt_x_rad, request.tilt_y_rad = tilt_rad
        if other is not None and other.context is not self.context:
            raise ArgumentError('the other problem is of another context, must be of the same', Status.ERROR_ARGUMENT)
        return self._study('match', other, ctypes.byref(request), progress=progress, options=options)

    def edge_derivatives(self, path: str, *, progress: Optional[ProgressCallable] = None,
                         **options: float) -> Result[EdgeDerivatives]:
        """How fast the edges change with the number at a path, in µm per unit of it."""
        return self._study('edge_derivatives', path.encode(), progress=progress, options=options)

    def index_derivatives(self, path: str, *, progress: Optional[ProgressCallable] = None,
                          **options: float) -> Result[IndexDerivatives]:
        """How fast the Bloch index at each wavelength changes with the number at a path, per unit of it."""
        return self._study('index_derivatives', path.encode(), progress=progress, options=options)

    def field(self, polarization: Union[Polarization, str], wavelength_um: float, order: int = 0, *,
              progress: Optional[ProgressCallable] = None, **options: float) -> Field:
        """The field of a Bloch mode.

        polarization   'ey' or 'hy'
        wavelength_um  in vacuum, µm; need not be one of the problem's
        order          lateral nodes, 0 to 199: 0 is the fundamental mode"""
        return self.context._call(lib.picket_field_find, self, packed(options), Polarization.of(polarization),
                                  wavelength_um, order, progress=progress, wrap=lambda p: Field(self.context, p))

    def section_field(self, wavelength_um: float, order: int = 0, *, progress: Optional[ProgressCallable] = None,
                      **options: float) -> SectionField:
        """The field of a mode of the `section`, by falling index from order 0, at a wavelength in vacuum, µm."""
        return self.context._call(lib.picket_section_field_find, self, packed(options), wavelength_um, order,
                                  progress=progress, wrap=lambda p: SectionField(self.context, p))

    def write_section_fields(self, path: Path, *, progress: Optional[ProgressCallable] = None,
                             **options: float) -> None:
        """Writes the fields of every wavelength of `light`, `count` modes each (default: all, up to 20), to an HDF5
        file that names its own units and conventions."""
        self.context._call(lib.picket_section_fields_write, self, packed(options), os.fsencode(path),
                           progress=progress)

    def write_fields(self, path: Path, *, progress: Optional[ProgressCallable] = None, **options: float) -> None:
        """Writes the fields of every wavelength and polarization of `light`, `count` modes each (default 1), to an
        HDF5 file that names its own units and conventions."""
        self.context._call(lib.picket_fields_write, self, packed(options), os.fsencode(path), progress=progress)

    def __repr__(self):
        return f'<picket.Problem{" (closed)" if self.closed else ""}>'
