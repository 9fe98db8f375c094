"""The modes of one section against NumPy: the matrix that print_section writes is built here a second
time, from Kronecker products, and its spectrum taken by dense LAPACK.
"""
import os
import subprocess
import unittest

import numpy
import scipy.linalg
import scipy.sparse

PROGRAM = os.path.join(os.environ["PICKET_BUILD_DIR"], "print_section")

# Entries up to 1e4 times β², all of them known to rounding.
TOLERANCE = 1e-9

WIDTH, HEIGHT, INSIDE, OUTSIDE = 0.45, 0.22, 3.4757**2, 1.444**2


def read():
    run = subprocess.run([PROGRAM], capture_output=True, text=True, check=True)
    entries, squares, lines, single = [], [], ([], []), {}
    for line in run.stdout.splitlines():
        kind, *words = line.split()
        if kind == "t":
            entries.append((int(words[0]), int(words[1]), complex(float(words[2]), float(words[3]))))
        elif kind == "square":
            squares.append(complex(float(words[0]), float(words[1])))
        elif kind == "line":
            lines[int(words[0])].append(float(words[2]))
        else:
            single[kind] = float(words[0])
    size = int(single["size"])
    rows, columns, values = zip(*entries)
    matrix = scipy.sparse.csc_matrix((values, (rows, columns)), shape=(size, size))
    return matrix, squares, [numpy.array(line) for line in lines], single["k0"]


def share(edges, half):
    """How much of each interval lies within half of the centre."""
    low, high = numpy.maximum(edges[:-1], -half), numpy.minimum(edges[1:], half)
    return numpy.maximum(high - low, 0) / numpy.diff(edges)


def permittivity(x_edges, y_edges):
    part = numpy.outer(share(x_edges, WIDTH / 2), share(y_edges, HEIGHT / 2))
    return scipy.sparse.diags((OUTSIDE + (INSIDE - OUTSIDE) * part).ravel())


def build(x, y, k0):
    """T between electric walls: fields on lines exist inside only."""
    halves = [0.5 * (line[1:] + line[:-1]) for line in (x, y)]
    up, down, one_line, one_gap = [], [], [], []
    for line, half in zip((x, y), halves):
        gaps = len(line) - 1
        difference = scipy.sparse.diags([1, -1], [0, -1], shape=(gaps, gaps - 1))
        up.append(scipy.sparse.diags(1 / numpy.diff(line)) @ difference)
        down.append(-scipy.sparse.diags(1 / numpy.diff(half)) @ difference.T)
        one_line.append(scipy.sparse.identity(gaps - 1))
        one_gap.append(scipy.sparse.identity(gaps))
    kron = scipy.sparse.kron
    divergence = scipy.sparse.hstack([kron(up[0], one_gap[1]), kron(one_gap[0], up[1])])
    curl = scipy.sparse.hstack([-kron(one_line[0], down[1]), kron(down[0], one_line[1])])
    gradient = scipy.sparse.vstack([kron(down[0], one_gap[1]), kron(one_gap[0], down[1])])
    turned = scipy.sparse.vstack([-kron(one_line[0], up[1]), kron(up[0], one_line[1])])
    eps_z = permittivity(halves[0], halves[1])
    eps_t = scipy.sparse.block_diag([permittivity(halves[0], y), permittivity(x, halves[1])])
    inverse = scipy.sparse.diags(1 / eps_z.diagonal())
    return k0**2 * eps_t + eps_t @ turned @ inverse @ curl + gradient @ divergence


class Section(unittest.TestCase):
    def test_matrix_and_modes(self):
        matrix, squares, lines, k0 = read()
        own = build(*lines, k0)
        self.assertEqual(own.shape, matrix.shape)
        self.assertLess(abs(own - matrix).max() / abs(matrix).max(), 1e-13)
        self.assertEqual(len(squares), 4)
        spectrum = scipy.linalg.eigvals(own.toarray())
        spectrum = spectrum[numpy.argsort(-spectrum.real)]
        numpy.testing.assert_allclose(squares, spectrum[:4], rtol=TOLERANCE)


if __name__ == "__main__":
    unittest.main()
