"""Prints what is in a file of mode fields, and draws the first mode if matplotlib is there.

    build/picket index --fields fields.h5 examples/bus_section.yaml
    python3 examples/read_fields.py fields.h5 [picture.png]
"""

import sys

import h5py
import numpy as np

UNKNOWN = {'ey': 'Ey', 'hy': 'Hy'}


def modes(file):
    """Every mode of the file, as (group, its field as it is and not only its periodic part)."""
    for polarization, wavelengths in file.items():
        for point in wavelengths.values():
            for mode in point.values():
                name = UNKNOWN[polarization]
                wave = np.exp(1j * mode.attrs['k_per_um'] * mode['z_um'][:])
                yield mode, name, mode[name][:] * wave[:, None]


def main():
    with h5py.File(sys.argv[1]) as file:
        found = list(modes(file))
        for mode, name, field in found:
            index = mode.attrs['bloch_index']
            print(f'{mode.name}: Bloch index {index.real:.6f}{index.imag:+.1e}i, '
                  f'largest |{name}| {np.abs(field).max():.4g} {mode[name].attrs["unit"]}')
        if len(sys.argv) > 2:
            from matplotlib import pyplot
            mode, name, field = found[0]
            pyplot.pcolormesh(mode['z_um'][:], mode['x_um'][:], field.real.T, shading='gouraud')
            pyplot.xlabel('z, um')
            pyplot.ylabel('x, um')
            pyplot.title(f'Re {name}, {mode.name}')
            pyplot.savefig(sys.argv[2])


if __name__ == '__main__':
    main()
