"""Bands of a lattice of pillars and the gap between them.

    python3 examples/p1_bands.py [picture.png]
"""

import pathlib
import sys

import picket

HERE = pathlib.Path(__file__).resolve().parent


def main():
    problem = picket.Problem.from_file(HERE / 'pillar_lattice.yaml')
    with problem.bands(count=4, points=4, accuracy=1e-2) as result:
        [answer] = result
        print(f'{answer.polarization.word}, pitch/wavelength')
        for point in answer.points:
            if point.label:
                print(f'  {point.label}', '  '.join(f'{float(q):.4f}' for q in point.frequency))
        for gap in answer.gaps:
            print(f'gap above band {gap.below}: {gap.start} to {gap.to}')
        # answer.frequencies is an array [points, bands]: how much the second band varies, for instance.
        second = answer.frequencies[:, 1]
        print(f'band 2 spans {second.min():.4f} to {second.max():.4f}')
        if len(sys.argv) > 1:
            result.plot().figure.savefig(sys.argv[1])


if __name__ == '__main__':
    main()
