"""How many unknowns the modes of a plain wire take to be right to 1e-5: the largest grid of the first answer
whose true error is below that. No time.

    python3 benchmarks/wire.py [PICKET]
"""
import json
import pathlib
import re
import subprocess
import sys

TOOL = sys.argv[1] if len(sys.argv) > 1 else str(pathlib.Path(__file__).resolve().parents[1] / 'build' / 'picket')
PROBLEM = '''format: 1
light: {wavelength_nm: 1550}
materials: {core: {constant: {index: 3.4757}}, clad: {constant: {index: 1.4440}}}
section: {cladding: clad, shapes: [{rect: {fill: core, width_nm: 450, height_nm: 220}}]}
'''
# An independent full-vector boundary-integral computation made for this project.
KNOWN = (2.3528329627, 1.7330946868)
ERROR, UNKNOWNS = 1e-5, 10000
GRID = re.compile(r'section: grid 1/\d+, (\d+) unknowns, index (\S+)')


def solve(accuracy):
    """Of each mode the relative error and the unknowns of the largest grid of its family."""
    done = subprocess.run([TOOL, 'modes', '--json', '--verbose', '--count', '2', '--accuracy', str(accuracy), '-'],
                          input=PROBLEM, capture_output=True, text=True, check=True)
    modes = json.loads(done.stdout)['results'][0]['points'][0]['modes']
    grids = [(int(n), float(index)) for n, index in GRID.findall(done.stderr)]
    return [(abs(mode['index']['value'] - known) / known,
             max(n for n, index in grids if abs(index - known) < 0.05)) for mode, known in zip(modes, KNOWN)]


def main():
    answers = [solve(accuracy) for accuracy in (5e-4, 2e-4, 1e-4, 5e-5)]
    for mode, name in enumerate(('te-like', 'tm-like')):
        most = min((n for answer in answers for error, n in [answer[mode]] if error <= ERROR), default=None)
        ratio = most / UNKNOWNS if most else float('inf')
        print(json.dumps({'work': f'unknowns of the largest grid for the {name} index to 1e-5 / 10000',
                          'ratio': round(ratio, 2), 'goal': '<= 1', 'meets': ratio <= 1, 'subject': 'wire',
                          'unknowns': most}))


main()
