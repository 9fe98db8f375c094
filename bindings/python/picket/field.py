"""The field of a Bloch mode as arrays."""

from __future__ import annotations

import ctypes
from typing import Union

import numpy as np

from ._layout import room_for, text
from ._library import lib
from .context import Owned
from .errors import Status, error
from .records import Component, FieldDescription, SectionFieldDescription

_NAMES = {text(lib.picket_component_name(c)): c for c in Component}


class _Buffers(Owned):
    """What fields share: numbers written into arrays of ours."""

    _kind = 'field'

    def unit(self, component: Union[str, Component]) -> str:
        """The unit of a component: 'V/m' or 'A/m'."""
        return text(lib.picket_component_unit(_number(component)))

    def _ask(self, function, *arguments):
        status = function(self._address, *arguments)
        if status != Status.OK:
            raise error(status, 'the field does not have that')

    def _doubles(self, function, count, *which):
        values = np.empty(count)
        self._ask(function, *which, values.ctypes.data_as(ctypes.POINTER(ctypes.c_double)), count)
        return values

    def _complex(self, function, shape, *which):
        return self._doubles(function, 2 * shape[0] * shape[1], *which).view(complex).reshape(shape)


def _number(component):
    """The number of a component of a name."""
    if component not in _NAMES and not isinstance(component, Component):
        raise KeyError(f'{component!r}, must be one of {", ".join(_NAMES)}')
    return int(_NAMES.get(component, component))


class Field(_Buffers):
    """The periodic part of the field of a mode over one pitch, on the nodes of a grid.

    field['Ey']         [nz, nx] complex: 'Ex', 'Ey', 'Ez' in V/m, 'Hx', 'Hy', 'Hz' in A/m
    field.permittivity  [nz, nx] complex, relative, averaged over the cell around each node
    field.z_um, x_um    [nz] and [nx], µm, rising; both ends of the pitch are among z
    field.wave          [nz] complex: exp(i k z); field['Ey'] * field.wave[:, None] is the field as it is

    Fields go as exp(-iωt); z runs along the guide, x across it, y out of the drawing. A mode that propagates carries
    1 W towards +z per metre of height; one that does not is scaled to a largest value of 1.
    """

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
        return self._complex(lib.picket_field_component, self.shape, _number(component))

    @property
    def permittivity(self) -> np.ndarray:
        """[nz, nx] complex, relative"""
        return self._complex(lib.picket_field_permittivity, self.shape)

    def plot(self, component: Union[str, Component] = None, axes=None):
        """Draws the real part of a component (default: the one normal to the drawing); returns the axes."""
        from .plot import draw_field
        return draw_field(self, component, axes)

    def __repr__(self):
        return f'<picket.Field{" (closed)" if self.closed else ""}>'


class SectionField(_Buffers):
    """The field of a mode of a section, on the staggered grid that it was solved on.

    field['Ex']                [nx, ny] complex, E in V/m and H in A/m; nx and ny differ between components
    field.places('Ex')         x [nx] and y [ny] of the component, µm, rising
    field.permittivity('Ex')   [nx, ny] complex, relative, what the scheme has there; of E only

    Fields go as exp(i(βz - ωt)); x across, y up, z along the guide. The mode carries 1 W towards +z.
    """

    def __init__(self, context, pointer):
        super().__init__(context, pointer, lib.picket_section_field_free)

    @property
    def description(self) -> SectionFieldDescription:
        """What the field is of."""
        room = room_for(SectionFieldDescription)
        self._ask(lib.picket_section_field_describe, ctypes.addressof(room))
        return SectionFieldDescription.read(room)

    def shape(self, component: Union[str, Component]) -> tuple[int, int]:
        """(nx, ny) of a component."""
        nx, ny = ctypes.c_int(), ctypes.c_int()
        self._ask(lib.picket_section_field_size, _number(component), ctypes.byref(nx), ctypes.byref(ny))
        return nx.value, ny.value

    def places(self, component: Union[str, Component]) -> tuple[np.ndarray, np.ndarray]:
        """x [nx] and y [ny] of a component, µm."""
        (nx, ny), which = self.shape(component), _number(component)
        return (self._doubles(lib.picket_section_field_places, nx, which, 1),
                self._doubles(lib.picket_section_field_places, ny, which, 2))

    def __getitem__(self, component: Union[str, Component]) -> np.ndarray:
        return self._complex(lib.picket_section_field_component, self.shape(component), _number(component))

    def permittivity(self, component: Union[str, Component]) -> np.ndarray:
        """[nx, ny] complex, relative: the entry xx, yy or zz for 'Ex', 'Ey' or 'Ez', at the places of that."""
        return self._complex(lib.picket_section_field_permittivity, self.shape(component), _number(component))

    def plot(self, component: Union[str, Component] = 'Ex', axes=None):
        """Draws the real part of a component with matplotlib; returns the axes."""
        from .plot import draw_section_field
        return draw_section_field(self, component, axes)

    def __repr__(self):
        return f'<picket.SectionField{" (closed)" if self.closed else ""}>'
