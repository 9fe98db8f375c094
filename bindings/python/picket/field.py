"""The field of a Bloch mode as arrays."""

from __future__ import annotations

import ctypes
from typing import Union

import numpy as np

from ._layout import room_for, text
from ._library import lib
from .context import Owned
from .errors import Status, error
from .records import Component, FieldDescription

_NAMES = {text(lib.picket_component_name(c)): c for c in Component}


class Field(Owned):
    """The periodic part of the field of a mode over one pitch, on the nodes of a grid.

    field['Ey']         [nz, nx] complex: 'Ex', 'Ey', 'Ez' in V/m, 'Hx', 'Hy', 'Hz' in A/m
    field.permittivity  [nz, nx] complex, relative, averaged over the cell around each node
    field.z_um, x_um    [nz] and [nx], µm, rising; both ends of the pitch are among z
    field.wave          [nz] complex: exp(i k z); field['Ey'] * field.wave[:, None] is the field as it is

    Fields go as exp(-iωt); z runs along the guide, x across it, y out of the drawing. A mode that propagates carries
    1 W towards +z per metre of height; one that does not is scaled to a largest value of 1.
    """

    _kind = 'field'

    def __init__(self, context, pointer):
        super().__init__(context, pointer, lib.picket_field_free)

    @property
    def description(self) -> FieldDescription:
        """What the field is of."""
        room = room_for(FieldDescription)
        self._ask(lib.picket_field_describe, ctypes.addressof(room))
        return FieldDescription.read(room)

    @property
    def shape(self) -> tuple[int, int]:
        """(nz, nx); nx is 1 where nothing varies along x."""
        nz, nx = ctypes.c_int(), ctypes.c_int()
        self._ask(lib.picket_field_size, ctypes.byref(nz), ctypes.byref(nx))
        return nz.value, nx.value

    @property
    def z_um(self) -> np.ndarray:
        """[nz] µm"""
        return self._doubles(lib.picket_field_lines, self.shape[0], 0)

    @property
    def x_um(self) -> np.ndarray:
        """[nx] µm"""
        return self._doubles(lib.picket_field_lines, self.shape[1], 1)

    @property
    def wave(self) -> np.ndarray:
        """[nz] complex: exp(i k z) with k = 2π index/wavelength."""
        about = self.description
        k = 2 * np.pi * complex(about.index_re, about.index_im) / about.wavelength_um
        return np.exp(1j * k * self.z_um)

    def __getitem__(self, component: Union[str, Component]) -> np.ndarray:
        if component not in _NAMES and not isinstance(component, Component):
            raise KeyError(f'{component!r}, must be one of {", ".join(_NAMES)}')
        return self._complex(lib.picket_field_component, int(_NAMES.get(component, component)))

    @property
    def permittivity(self) -> np.ndarray:
        """[nz, nx] complex, relative"""
        return self._complex(lib.picket_field_permittivity)

    def unit(self, component: Union[str, Component]) -> str:
        """The unit of a component: 'V/m' or 'A/m'."""
        return text(lib.picket_component_unit(int(_NAMES.get(component, component))))

    def plot(self, component: Union[str, Component] = None, axes=None):
        """Draws the real part of a component (default: the one normal to the drawing); returns the axes."""
        from .plot import draw_field
        return draw_field(self, component, axes)

    def _ask(self, function, *arguments):
        status = function(self._address, *arguments)
        if status != Status.OK:
            raise error(status, 'the field does not have that')

    def _doubles(self, function, count, *which):
        values = np.empty(count)
        self._ask(function, *which, values.ctypes.data_as(ctypes.POINTER(ctypes.c_double)), count)
        return values

    def _complex(self, function, *which):
        nz, nx = self.shape
        return self._doubles(function, 2 * nz * nx, *which).view(complex).reshape(nz, nx)

    def __repr__(self):
        return f'<picket.Field{" (closed)" if self.closed else ""}>'
