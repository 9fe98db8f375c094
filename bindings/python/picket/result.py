"""Results: a sequence of answers, documents, and columns of arrays."""

from __future__ import annotations

import ctypes
import json
from typing import Generic, Iterator, Optional, TypeVar, Union

import numpy as np

from . import _library
from ._layout import is_record, room_for, text
from ._library import lib
from .context import Owned
from .errors import Status, error
from .records import Quantity, _Word

Answer = TypeVar('Answer')


class _Document(Owned):
    """What every result has, whatever was asked."""

    _kind = 'result'

    def __init__(self, context, pointer):
        super().__init__(context, pointer, lib.picket_result_free)

    @property
    def complete(self) -> bool:
        """True if every number reached the accuracy asked for."""
        return lib.picket_result_complete(self._address)

    @property
    def shortfall(self) -> str:
        """One sentence on what is missing; '' if complete."""
        return text(lib.picket_result_shortfall(self._address))

    def json(self) -> str:
        """The document that the tool prints with --json; lengths in nm."""
        return self._written(lib.picket_result_json)

    def csv(self) -> str:
        """Comma-separated values with one header line, units in the names of the columns; lengths in nm."""
        return self._written(lib.picket_result_csv)

    def to_dict(self) -> dict:
        """The JSON document as dictionaries and lists."""
        return json.loads(self.json())

    def _written(self, function):
        with self.context._turn():
            found = text(function(self._address))
        if found is None:
            raise error(Status.ERROR_MEMORY, text(lib.picket_context_message(self.context._address)))
        return found


class Summary(_Document):
    """What was understood of a problem. str() is the text for people."""

    @property
    def lines(self) -> list[str]:
        """The lines of the text."""
        found = []
        while True:
            line = text(lib.picket_summary_line(self._address, len(found)))
            if line is None:
                return found
            found.append(line)

    def __str__(self):
        return '\n'.join(self.lines)


class Result(_Document, Generic[Answer]):
    """The answers of a study, one for each polarization: a sequence that takes a number or a word, result[0] or
    result['hy']. `study` is its name."""

    def __init__(self, context, pointer, study: str):
        super().__init__(context, pointer)
        self.study = study
        self._answers = None

    @property
    def answers(self) -> tuple[Answer, ...]:
        """The answers as records (module picket.records); they outlive the result."""
        address = self._address
        if self._answers is None:
            kind = _library.STUDIES[self.study][0]
            get = getattr(lib, f'picket_{self.study}_get')
            found = []
            for i in range(getattr(lib, f'picket_{self.study}_count')(address)):
                room = room_for(kind)
                status = get(address, i, ctypes.addressof(room))
                if status != Status.OK:
                    raise error(status, f'answer {i} could not be had')
                found.append(kind.read(room))
            self._answers = tuple(found)
        return self._answers

    def __len__(self) -> int:
        return len(self.answers)

    def __iter__(self) -> Iterator[Answer]:
        return iter(self.answers)

    def __getitem__(self, which: Union[int, str]) -> Answer:
        if not isinstance(which, str):
            return self.answers[which]
        for answer in self.answers:
            if word(answer) == which:
                return answer
        raise KeyError(which)

    @property
    def path(self) -> Optional[str]:
        """The path that was swept; None if nothing was."""
        return text(lib.picket_sweep_path(self._address))

    @property
    def values(self) -> Optional[np.ndarray]:
        """[len(result)]: the value of the swept number that each answer belongs to; None without a sweep."""
        if self.path is None:
            return None
        found = np.empty(len(self))
        for i in range(len(self)):
            place = ctypes.cast(found.ctypes.data + 8 * i, ctypes.POINTER(ctypes.c_double))
            if lib.picket_sweep_value(self._address, i, place) != Status.OK:
                raise error(Status.ERROR_INTERNAL, f'answer {i} has no value')
        return found

    def columns(self) -> dict[str, np.ndarray]:
        """All answers as one table: arrays of equal length by the name of the column, as pandas.DataFrame takes it.

        A row for each band, mode or stop band. A number with a bar has a second column NAME_uncertainty. Units are
        those of the records: µm, not nm. What a row lacks is NaN or None; words stand for polarization and regime."""
        swept = self.path
        known = [{} for _ in self] if swept is None else [{swept: value} for value in self.values]
        return table([row for answer, own in zip(self.answers, known) for row in _rows(answer, own)])

    def plot(self, axes=None):
        """Draws the result with matplotlib, into `axes` or a new figure; returns the axes."""
        from .plot import draw
        return draw(self, axes)

    def __repr__(self):
        return f'<picket.Result {self.study}{" (closed)" if self.closed else ""}>'


def word(answer):
    """The word of an answer's polarization; '' if it has none."""
    polarization = getattr(answer, 'polarization', '')
    return getattr(polarization, 'word', polarization)


# --- Columns

def _flat(record, prefix=''):
    """The columns of a record itself, without its arrays."""
    found = {}
    for field in record._fields:
        name, value = prefix + field.name, getattr(record, field.name)
        if isinstance(value, Quantity):
            found[name], found[f'{name}_uncertainty'] = value.value, value.uncertainty
        elif is_record(type(value)):
            found.update(_flat(value, f'{name}_'))
        elif isinstance(value, _Word):
            found[name] = value.word
        elif 'count' not in field.metadata and not name.endswith('_count'):
            found[name] = value
    return found


def _rows(record, above):
    """The rows of a record: one for each element of the array that is marked so, or one if there is none."""
    own = {**above, **_flat(record)}
    field = next((f for f in record._fields if f.metadata.get('rows')), None)
    elements = getattr(record, field.name) if field else ()
    if not elements:
        return [own]
    if isinstance(elements[0], Quantity):
        return [{**own, field.metadata['number']: i, field.name: q.value, f'{field.name}_uncertainty': q.uncertainty}
                for i, q in enumerate(elements)]
    return [row for element in elements for row in _rows(element, own)]


def table(rows):
    """Rows, each a dictionary, as a dictionary of arrays."""
    names = dict.fromkeys(name for row in rows for name in row)
    return {name: _column([row.get(name) for row in rows]) for name in names}


def _column(values):
    known = [v for v in values if v is not None]
    if not known or any(isinstance(v, str) for v in known):
        return np.array(values, dtype=object)
    if len(known) < len(values):
        return np.array([np.nan if v is None else v for v in values], dtype=float)
    return np.array(values)
