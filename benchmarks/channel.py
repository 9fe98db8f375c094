"""What a channel costs against the grid of its section and the harmonics along z: unknowns, entries of the factors,
memory of a factorisation and its time, as the library reports them while it refines an answer.

    python3 benchmarks/channel.py [PICKET] [ACCURACY]

Prints a table for DEVELOPERS.md. Seconds are those of one factorisation (wall clock) and depend on the machine.
"""
import pathlib
import re
import subprocess
import sys

ROOT = pathlib.Path(__file__).resolve().parents[1]
GRID = re.compile(r'grid 1/(\d+), harmonics (-?\d+) to (\d+), (\d+) unknowns')
FACTOR = re.compile(r'factorised: (\d+) entries in L \+ U, \S+ operations, (\S+) MB at the peak, (\S+) s')


def rows(tool, accuracy):
    done = subprocess.run([tool, 'edges', '--accuracy', accuracy, '--verbose', '--jobs', '1',
                           str(ROOT / 'examples' / 'bus_channel.yaml')], capture_output=True, text=True, check=False)
    last, found = None, {}
    for line in done.stderr.splitlines():
        if match := FACTOR.search(line):
            last = match.groups()
        elif (match := GRID.search(line)) and last:
            grid, low, high, unknowns = map(int, match.groups())
            found[high - low + 1, grid] = (unknowns, int(last[0]), float(last[1]), float(last[2]))
    return found


def main():
    tool = sys.argv[1] if len(sys.argv) > 1 else str(ROOT / 'build' / 'picket')
    accuracy = sys.argv[2] if len(sys.argv) > 2 else '1e-4'
    print('| harmonics | grid | unknowns | entries in L + U | MB | s |\n| --- | --- | --- | --- | --- | --- |')
    for (count, grid), (unknowns, entries, memory, seconds) in sorted(rows(tool, accuracy).items()):
        print(f'| {count} | 1/{grid} | {unknowns} | {entries / 1e6:.2f} M | {memory:.0f} | {seconds:.2f} |')


if __name__ == '__main__':
    main()
