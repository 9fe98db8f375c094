"""Bloch index and group index of the strain cable's bus over its operating band, with progress and Ctrl-C.

    python3 examples/p2_index_sweep.py [table.csv]

Ctrl-C ends the sweep; what was finished by then is printed all the same.
"""

import pathlib
import sys

import picket

HERE = pathlib.Path(__file__).resolve().parent


def progress(phase, fraction):
    if sys.stderr.isatty():
        print(f'\r{phase}: {100 * fraction:3.0f} %', end='', file=sys.stderr)


def sweep():
    """The result, partial if it was interrupted."""
    problem = picket.Problem.from_file(HERE / 'bus_section.yaml')
    problem['light.wavelength_nm'] = {'from': 1530, 'to': 1570, 'points': 3}
    try:
        return problem.index(accuracy=1e-3, jobs=0, progress=progress)
    except KeyboardInterrupt as interrupt:
        stopped = interrupt.__cause__
        if stopped is None or stopped.partial is None:
            raise
        return stopped.partial


def main():
    result = sweep()
    columns = result.columns()      # pandas.DataFrame(columns) would be a table
    print('wavelength, nm   Bloch index   group index   regime')
    for i, wavelength in enumerate(columns['wavelength_um']):
        print(f'{1000 * wavelength:14.1f} {columns["bloch_index"][i]:13.6f} {columns["group_index"][i]:13.5f}   '
              f'{columns["regime"][i]}')
    if not result.complete:
        print(result.shortfall)
    if len(sys.argv) > 1:
        pathlib.Path(sys.argv[1]).write_text(result.csv(), encoding='utf-8')


if __name__ == '__main__':
    main()
