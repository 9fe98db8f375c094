"""Records: one class says how a struct lies in memory, what Python shows of it and what it means.

A class under `@record('picket_stop_band')` is a frozen dataclass whose annotations name the members of the C struct
in their order:

    int, float, bool     int, double, bool
    Optional[str]        const char *, null is None
    an IntEnum           an enumeration
    another record       a struct inside
    Tuple[T, ...]        a pointer to T, declared with `many`; the number of elements is an int of the struct

Everything is copied out of the library's memory, so a record outlives the result it came from.
"""

import ctypes
import dataclasses
import enum
import typing

_PLAIN = {int: ctypes.c_int, float: ctypes.c_double, bool: ctypes.c_bool,
          str: ctypes.c_char_p, typing.Optional[str]: ctypes.c_char_p}

# The library writes whole structs into memory of ours. Answers have no size stamp: room for what a later version
# might add behind the members known here.
SLACK = 1024


def many(count, rows=False, above=False, number=None):
    """An array: `count` is the int that says how long it is. It lies right before the pointer or, `above`, in the
    record that this one is an element of. `rows`: columns have a row for each element; `number`: and a column of
    this name for its place."""
    return dataclasses.field(metadata={'count': count, 'rows': rows, 'above': above, 'number': number})


def stored(c_type=None, name=None):
    """A member that C stores as another type than the annotation says, or under a name that Python reserves."""
    return dataclasses.field(metadata={'c': c_type, 'name': name})


def record(c_name):
    """Class decorator, see above."""
    def make(cls):
        cls = dataclasses.dataclass(frozen=True)(cls)
        hints = typing.get_type_hints(cls)
        cls._fields = dataclasses.fields(cls)
        members, cls._readers = [], []
        for field in cls._fields:
            more, reader = _member(field, hints[field.name])
            members += more
            cls._readers.append(reader)
        cls.C = type(c_name, (ctypes.Structure,), {'_fields_': members})
        cls.c_name = c_name
        cls.read = classmethod(_read)
        RECORDS.append(cls)
        return cls
    return make


RECORDS = []  # every record, for the test that compares them with the headers


def is_record(kind):
    return dataclasses.is_dataclass(kind) and hasattr(kind, 'C')


def _read(cls, struct, above=None):
    """A record from a struct; `above` is the struct of the record that holds it."""
    return cls(*(reader(struct, above) for reader in cls._readers))


def text(raw):
    """Text of the library; None for null."""
    return None if raw is None else raw.decode('utf-8', 'replace')


def _member(field, hint):
    """The members of the struct for a field, and what reads its value."""
    name = field.metadata.get('name') or field.name
    if 'count' in field.metadata:
        return _array(field, typing.get_args(hint)[0])
    if is_record(hint):
        return [(name, hint.C)], lambda s, above: hint.read(getattr(s, name), s)
    if isinstance(hint, type) and issubclass(hint, enum.IntEnum):
        return [(name, ctypes.c_int)], lambda s, above: _enumerator(hint, getattr(s, name))
    if hint in (str, typing.Optional[str]):
        return [(name, ctypes.c_char_p)], lambda s, above: text(getattr(s, name))
    return [(name, field.metadata.get('c') or _PLAIN[hint])], lambda s, above: hint(getattr(s, name))


def _enumerator(kind, value):
    """The word of a value; a later library may know more values than this table."""
    try:
        return kind(value)
    except ValueError:
        return value


def _array(field, element):
    name, count, in_parent = field.name, field.metadata['count'], field.metadata['above']
    c_type = element.C if is_record(element) else _PLAIN[element]
    members = [(name, ctypes.POINTER(c_type))]
    if not in_parent:
        members.insert(0, (count, ctypes.c_int))

    def reader(struct, above):
        values = getattr(struct, name)
        length = getattr(above if in_parent else struct, count) if values else 0
        if is_record(element):
            return tuple(element.read(values[i], struct) for i in range(length))
        return tuple(values[i] for i in range(length))
    return members, reader


def room_for(cls):
    """A struct of a record for the library to write into, with slack behind it."""
    return cls.C.from_buffer(bytearray(ctypes.sizeof(cls.C) + SLACK))
