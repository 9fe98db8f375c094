"""Bloch modes of a row of teeth against a direct three-dimensional solve: curl curl E = k0² ε E on the
staggered grid of K. S. Yee, with the lines of the channel across and N equal steps along z, built here
from Kronecker products. As N grows it becomes the channel with all harmonics, by N⁻².
"""
import os
import subprocess
import unittest

import numpy
import scipy.sparse
import scipy.sparse.linalg

PROGRAM = os.path.join(os.environ["PICKET_BUILD_DIR"], "print_channel")
WIDTH, HEIGHT, INSIDE, OUTSIDE = 0.45, 0.22, 3.4757**2, 1.444**2
STEPS = (12, 24)  # along a pitch; walls of teeth on nodes

kron = scipy.sparse.kron
eye = scipy.sparse.identity
diags = scipy.sparse.diags


def read():
    run = subprocess.run([PROGRAM], capture_output=True, text=True, check=True)
    single, lines, squares = {}, {(f, a): [] for f in (0, 1) for a in (0, 1)}, {}
    for line in run.stdout.splitlines():
        kind, *words = line.split()
        if kind == "line":
            lines[int(words[0]), int(words[1])].append(float(words[3]))
        elif kind == "mode":
            squares[int(words[0])] = float(words[1])
        else:
            single[kind] = float(words[0])
    return single, {key: numpy.array(value) for key, value in lines.items()}, squares


class Axis:
    """Half of a mirrored axis: nodes carry tangential E except at the outer wall, and at the plane if
    `odd`; gaps lie between them."""

    def __init__(self, line, odd):
        keep = slice(1 if odd else 0, -1)
        gap, half = numpy.diff(line), 0.5 * (line[1:] + line[:-1])
        edges = numpy.concatenate([[line[0]], half, [line[-1]]])
        self.gap, self.node = gap, numpy.diff(edges)[keep]
        difference = diags([-1, 1], [0, 1], shape=(len(gap), len(gap) + 1)).tocsc()
        self.up = diags(1 / gap) @ difference[:, keep]
        self.at_gap = (line[:-1], line[1:])
        self.at_node = (edges[:-1][keep], edges[1:][keep])


class Period:
    def __init__(self, pitch, steps, k):
        self.gap = self.node = numpy.full(steps, pitch / steps)
        forward = diags([-1, 1], [0, 1], shape=(steps, steps), dtype=complex).tolil()
        forward[steps - 1, 0] = numpy.exp(1j * k * pitch)
        self.up = forward.tocsc() * (steps / pitch)
        low = -pitch / 2 + numpy.arange(steps) * pitch / steps
        self.at_gap = (low, low + pitch / steps)
        self.at_node = (low - pitch / steps / 2, low + pitch / steps / 2)


def share(extent, half):
    low, high = numpy.maximum(extent[0], -half), numpy.minimum(extent[1], half)
    return numpy.maximum(high - low, 0) / (extent[1] - extent[0])


def box(places):
    """Product of three vectors over all places, x slowest."""
    return numpy.einsum("i,j,k->ijk", *places).ravel()


def solve(lines, family, single, steps, guess):
    axes = [Axis(lines[family, 0], family == 0), Axis(lines[family, 1], family == 1),
            Period(single["pitch"], steps, single["k"])]
    halves = [WIDTH / 2, HEIGHT / 2, single["tooth"] / 2]
    one_node, one_gap = [eye(len(a.node)) for a in axes], [eye(len(a.gap)) for a in axes]

    def along(axis, where):
        """The difference along an axis at places that are 'g'aps or 'n'odes of the other two."""
        parts = [one_gap[i] if w == "g" else one_node[i] for i, w in enumerate(where)]
        parts[axis] = axes[axis].up
        return kron(kron(parts[0], parts[1]), parts[2])

    curl = scipy.sparse.bmat([
        [None, -along(2, "ngn"), along(1, "nng")],
        [along(2, "gnn"), None, -along(0, "nng")],
        [-along(1, "gnn"), along(0, "ngn"), None]])

    def volumes(places):
        return numpy.concatenate([
            box([a.gap if w == "g" else a.node for a, w in zip(axes, where)]) for where in places])

    def permittivity(where):
        extents = [a.at_gap if w == "g" else a.at_node for a, w in zip(axes, where)]
        x, y, z = [share(e, h) for e, h in zip(extents, halves)]
        return OUTSIDE + (INSIDE - OUTSIDE) * box([x, y, z])

    electric, magnetic = ("gnn", "ngn", "nng"), ("ngg", "gng", "ggn")
    root = diags(1 / numpy.sqrt(volumes(electric) * numpy.concatenate(
        [permittivity(where) for where in electric])))
    matrix = root @ curl.conj().T @ diags(volumes(magnetic)) @ curl @ root
    values = scipy.sparse.linalg.eigsh(matrix.tocsc(), k=1, sigma=guess * 1.0001, tol=1e-10,
                                       return_eigenvectors=False)
    return values[0]


class Channel(unittest.TestCase):
    def test_direct_solve(self):
        single, lines, squares = read()
        for family in (0, 1):
            coarse, fine = [solve(lines, family, single, n, squares[family]) for n in STEPS]
            limit = fine + (fine - coarse) / 3
            index, own = [single["k"] / numpy.sqrt(v) for v in (squares[family], limit)]
            change = abs(single["k"] / numpy.sqrt(fine) - own)
            print(f"family {family}: index {index:.7f}, direct {own:.7f} from steps of {change:.1e}")
            self.assertLess(change, 5e-3)
            self.assertLess(abs(index - own), 0.05 * change)


if __name__ == "__main__":
    unittest.main()
