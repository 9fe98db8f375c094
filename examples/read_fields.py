"""Prints what is in a file of mode fields, and draws the first mode if matplotlib is there.

    build/picket index --fields fields.h5 examples/bus_section.yaml
    python3 examples/read_fields.py fields.h5 [picture.png]

The same with `picket modes` and a file that has a section.
"""

import sys

import h5py
import numpy as np

UNKNOWN = {'ey': 'Ey', 'hy': 'Hy'}


def bloch_mode(mode, polarization):
    """What to say of a mode of a cell: name and values of a component, lines across and upwards in a
    picture. The field as it is and not only its periodic part."""
    name = UNKNOWN[polarization]
    wave = np.exp(1j * mode.attrs['k_per_um'] * mode['z_um'][:])
    return name, mode[name][:] * wave[:, None], 'z_um', 'x_um'


def section_mode(mode):
    """The same of a section: the larger of Ex and Ey."""
    name = max(('Ex', 'Ey'), key=lambda each: np.abs(mode[each][:]).max())
    return name, mode[name][:], *mode[name].attrs['axes'].split(', ')


def modes(file):
    """Every mode of the file."""
    for kind, wavelengths in file.items():
        for point in wavelengths.values():
            for mode in point.values():
                yield mode, *(section_mode(mode) if kind == 'section' else bloch_mode(mode, kind))


def main():
    with h5py.File(sys.argv[1]) as file:
        found = list(modes(file))
        for mode, name, field, _, _ in found:
            word = 'Bloch index' if 'bloch_index' in mode.attrs else 'index'
            index = mode.attrs[word.lower().replace(' ', '_')]
            print(f'{mode.name}: {word} {index.real:.6f}{index.imag:+.1e}i, '
                  f'largest |{name}| {np.abs(field).max():.4g} {mode[name].attrs["unit"]}')
        if len(sys.argv) > 2:
            from matplotlib import pyplot
            mode, name, field, across, upwards = found[0]
            pyplot.pcolormesh(mode[across][:], mode[upwards][:], field.real.T, shading='gouraud')
            pyplot.xlabel(across)
            pyplot.ylabel(upwards)
            pyplot.title(f'Re {name}, {mode.name}')
            pyplot.savefig(sys.argv[2])


if __name__ == '__main__':
    main()
