"""The pitch at which the bus clears its stop band by a wanted margin, by Newton's method on the library's derivatives.

    python3 examples/p3_edge_search.py [clearance in nm]
"""

import pathlib
import sys

import picket

HERE = pathlib.Path(__file__).resolve().parent
PITCH = 'cell.pitch_nm'


def main():
    wanted = float(sys.argv[1]) if len(sys.argv) > 1 else 150.0
    problem = picket.Problem.from_file(HERE / 'bus_section.yaml')
    pitch = 345.0                   # that of the file
    for step in range(8):
        problem[PITCH] = pitch
        operating = problem.edges(accuracy=1e-3)['hy'].operating
        clearance = 1000 * operating.clearance_um.value
        bar = 1000 * operating.clearance_um.uncertainty
        print(f'pitch {pitch:8.3f} nm: clearance {clearance:8.3f} ± {bar:.3f} nm')
        if abs(clearance - wanted) < max(0.1, bar):
            break
        # The clearance falls as the long edge rises; both count in µm per nm of pitch here.
        slope = -1000 * problem.edge_derivatives(PITCH, accuracy=1e-3)['hy'].bands[0].long_um.value
        pitch += (wanted - clearance) / slope
    else:
        sys.exit('no pitch found')
    print(f'{pitch:.2f} nm')


if __name__ == '__main__':
    main()
