"""The time to a band edge known to 1e-5: the plain second-order scheme against the library (edge.c says how).

    compare_edge.py EDGE FILE     EDGE: the program built from edge.c

The same scheme through SciPy: one factorisation and one mode next to the known edge, so SciPy is not charged for
finding it, for the other edge or for the coarser grids. Its time on the last grid is extrapolated along a line in both
logarithms through three smaller grids. That line has no goal: it is the least that the work can be.

Prints a line of JSON for each; `ratio` is the plain scheme's CPU time over ours.
"""
import json
import math
import os
import subprocess
import sys
import tempfile
import time

import numpy as np
import scipy.sparse as sparse
import scipy.sparse.linalg as linalg

GOAL = 30
STEPS = (35, 51, 71)


def read_matrix(path):
    with open(path, 'rb') as file:
        n, entries = np.fromfile(file, np.int64, 2)
        start = np.fromfile(file, np.int64, n + 1)
        row = np.fromfile(file, np.int64, entries)
        values = np.fromfile(file, np.complex128, entries)
        mass = np.fromfile(file, np.complex128, n)
    return sparse.csc_matrix((values.real, row, start), shape=(n, n)), mass.real


def one_mode(matrix, mass, shift):
    """CPU seconds and the level; real, for the zone edge of a lossless cell is."""
    root = sparse.diags(1 / np.sqrt(mass))
    begin = time.process_time()
    standard = (root @ matrix @ root).tocsc()
    shifted = linalg.splu(standard - shift * sparse.identity(len(mass), format='csc'))
    inverse = linalg.LinearOperator(standard.shape, shifted.solve, dtype=float)
    levels = linalg.eigsh(standard, 1, sigma=shift, OPinv=inverse, tol=1e-10)[0]
    return time.process_time() - begin, levels[0]


def line(work, ratio, goal=None, **more):
    print(json.dumps({'work': work, 'ratio': round(ratio, 1), 'goal': goal and f'>= {goal}',
                      'meets': goal and ratio >= goal,
                      'subject': 'examples/bus_section.yaml', **more}), flush=True)


program, problem = sys.argv[1:]
ours = json.loads(subprocess.run([program, problem], check=True, capture_output=True, text=True).stdout)
line('edges to 1e-5: plain scheme, refined twofold / library', ours['plain_seconds'] / ours['seconds'], GOAL,
     unknowns=ours['plain_unknowns'], repetitions=1, plain_error=ours['plain_error'], library_bar=ours['bar'])
line('edges to 1e-5: last grid of the plain scheme / library', ours['last_plain_seconds'] / ours['seconds'],
     unknowns=ours['plain_unknowns'], repetitions=1)

sizes, seconds = [], []
with tempfile.TemporaryDirectory() as folder:
    path = os.path.join(folder, 'matrix')
    for steps in STEPS:
        subprocess.run([program, problem, path, str(steps)], check=True)
        matrix, mass = read_matrix(path)
        spent, level = one_mode(matrix, mass, (2 * math.pi / ours['edge_um'])**2)
        if abs(2 * math.pi / math.sqrt(level) / ours['edge_um'] - 1) > 1e-3:
            sys.exit('benchmark: SciPy found another mode')
        sizes.append(matrix.shape[0])
        seconds.append(spent)
growth, constant = np.polyfit(np.log(sizes), np.log(seconds), 1)
whole = math.exp(constant + growth * math.log(ours['plain_unknowns']))
line('edges to 1e-5: one mode of the plain scheme through SciPy / library', whole / ours['seconds'],
     unknowns=ours['plain_unknowns'], repetitions=1, extrapolated_from=sizes, growth=round(float(growth), 2))
