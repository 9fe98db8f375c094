"""The Bloch point of peer.c through SciPy: SuperLU and ARPACK, called the way its manual shows.

    compare_scipy.py PEER     PEER: the program built from peer.c

Both sides solve for the ten modes nearest to the same shift with a tolerance of 1e-10. Prints one line
of JSON per subject; `ratio` is SciPy's CPU time over ours. The lines have no goal of their own: SciPy
is a general tool and the matrix is in its hands as it would be in a user's.
"""
import json
import os
import statistics
import subprocess
import sys
import tempfile
import time

import numpy as np
import scipy.sparse as sparse
import scipy.sparse.linalg as linalg

MODES = 10
RUNS = 5  # of both sides in turn
SUBJECTS = ((0, 'teeth', 1e4), (0, 'teeth', 4e4), (1, 'pillars', 1e4), (1, 'pillars', 4e4))


def read_matrices(path):
    with open(path, 'rb') as file:
        n, entries = np.fromfile(file, np.int64, 2)
        start = np.fromfile(file, np.int64, n + 1)
        row = np.fromfile(file, np.int64, entries)
        values = np.fromfile(file, np.complex128, entries)
        mass = np.fromfile(file, np.complex128, n)
    return sparse.csc_matrix((values, row, start), shape=(n, n)), mass


def solve(matrix, mass, shift):
    """CPU seconds and the levels: B is diagonal, so the standard problem on B^-½ A B^-½ is given."""
    root = sparse.diags(1 / np.sqrt(mass))
    standard = (root @ matrix @ root).tocsc()
    begin = time.process_time()
    shifted = linalg.splu(standard - shift * sparse.identity(len(mass), format='csc'))
    inverse = linalg.LinearOperator(standard.shape, shifted.solve, dtype=complex)
    levels = linalg.eigs(standard, MODES, sigma=shift, OPinv=inverse, tol=1e-10,
                         return_eigenvectors=True)[0]
    return time.process_time() - begin, np.sort(levels.real)


def compare(peer, shape, name, unknowns):
    ratios, agree = [], 0.0
    with tempfile.TemporaryDirectory() as folder:
        path = os.path.join(folder, 'matrix')
        for _ in range(RUNS):
            ours = json.loads(subprocess.run([peer, path, str(unknowns), str(shape)], check=True,
                                             capture_output=True, text=True).stdout)
            seconds, levels = solve(*read_matrices(path), ours['shift'])
            ratios.append(seconds / ours['seconds'])
            agree = max(agree, float(np.max(np.abs(levels / np.array(ours['levels']) - 1))))
    print(json.dumps({'work': 'ten modes at one phase: SciPy / ours',
                      'ratio': round(statistics.median(ratios), 2), 'goal': None, 'meets': None,
                      'subject': name, 'unknowns': ours['unknowns'], 'repetitions': RUNS,
                      'levels_agree_to': float(f'{agree:.1e}')}), flush=True)
    if not agree < 1e-8:
        sys.exit(f'benchmark: the levels of SciPy and ours differ by {agree:.1e}')


for subject in SUBJECTS:
    compare(sys.argv[1], *subject)
