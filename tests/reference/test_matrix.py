"""The lowest eigenvalues of an assembled matrix against SciPy: dense LAPACK on the matrices that
print_matrix writes, and shift-invert through SciPy's own sparse LU.
"""
import os
import subprocess
import unittest

import numpy
import scipy.linalg
import scipy.sparse
import scipy.sparse.linalg

PROGRAM = os.path.join(os.environ["PICKET_BUILD_DIR"], "print_matrix")

# A dense solve of the whole spectrum (up to 1e4 times the lowest values) is good to 1e-12 of them.
TOLERANCE = 1e-9


def read(polarization):
    run = subprocess.run([PROGRAM, polarization], capture_output=True, text=True, check=True)
    rows, columns, values, mass, levels = [], [], [], {}, []
    size = 0
    for line in run.stdout.splitlines():
        kind, *words = line.split()
        if kind == "size":
            size = int(words[0])
        elif kind == "a":
            rows.append(int(words[0]))
            columns.append(int(words[1]))
            values.append(complex(float(words[2]), float(words[3])))
        elif kind == "b":
            mass[int(words[0])] = complex(float(words[1]), float(words[2]))
        elif kind == "lambda":
            levels.append(float(words[0]))
    matrix = scipy.sparse.csc_matrix((values, (rows, columns)), shape=(size, size))
    diagonal = numpy.array([mass[i] for i in range(size)])
    return matrix, diagonal, numpy.array(levels)


class Matrix(unittest.TestCase):
    def check(self, polarization):
        matrix, mass, levels = read(polarization)
        self.assertEqual(len(levels), 8)
        self.assertEqual(abs(matrix - matrix.conj().T).max(), 0)
        self.assertEqual(abs(mass.imag).max(), 0)
        root = 1 / numpy.sqrt(mass.real)
        scaled = scipy.sparse.diags(root) @ matrix @ scipy.sparse.diags(root)
        dense = scipy.linalg.eigh(scaled.toarray(), eigvals_only=True)
        self.assertGreater(dense[0], 0)
        numpy.testing.assert_allclose(levels, dense[: len(levels)], rtol=TOLERANCE)
        sparse = scipy.sparse.linalg.eigsh(
            scaled.tocsc(), k=len(levels), sigma=-3, return_eigenvectors=False
        )
        numpy.testing.assert_allclose(levels, numpy.sort(sparse), rtol=TOLERANCE)

    def test_ey(self):
        self.check("ey")

    def test_hy(self):
        self.check("hy")


if __name__ == "__main__":
    unittest.main()
