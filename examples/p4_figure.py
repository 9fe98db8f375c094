"""The first block of the README as a figure: the stop band of the strain cable's bus and its operating band, beside
the band that the stop band lies above.

    python3 examples/p4_figure.py [picture.png]

Without matplotlib only the numbers are printed.
"""

import pathlib
import sys

import picket

HERE = pathlib.Path(__file__).resolve().parent


def draw(edges, bands, pitch_um, path):
    from matplotlib import pyplot
    figure, (left, right) = pyplot.subplots(1, 2, figsize=(9, 4), layout='constrained')
    bands.plot(left)
    left.set_xlabel('k, π/pitch')
    band = edges['hy'].bands[0]
    left.axhspan(pitch_um / band.long_um.value, pitch_um / band.short_um.value, color='0.8')
    edges.plot(right)
    right.set_title(f'clearance {1000 * edges["hy"].operating.clearance_um.value:.3f} nm')
    figure.savefig(path)


def main():
    problem = picket.Problem.from_file(HERE / 'bus_section.yaml')
    edges = problem.edges()
    operating = edges['hy'].operating
    print(f'hy: {operating.regime.word} from {1000 * operating.from_um:.0f} to {1000 * operating.to_um:.0f} nm')
    for band in edges['hy'].bands:
        print(f'  stop band {band.order}: {band.short_um} to {band.long_um} µm, '
              f'{band.attenuation_db_per_pitch} dB/pitch')
    print(f'  clearance {operating.clearance_um} µm')
    try:
        import matplotlib
    except ImportError:
        return
    matplotlib.use('Agg')           # a file, no window
    path = sys.argv[1] if len(sys.argv) > 1 else 'bus_section.png'
    bands = problem.bands(count=1, points=5, accuracy=1e-2)
    draw(edges, bands, 0.345, path)
    print(path)


if __name__ == '__main__':
    main()
