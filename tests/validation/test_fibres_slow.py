"""Rods, whose curved interfaces cut the cells, against the roots of the step-index fibre at the finest grids."""
import unittest

import drive
import test_sections


class Fibres(unittest.TestCase):
    def test_glass_strand(self):
        """1e-5 asked: the value is within 1e-5 and its bar covers the root."""
        case = next(case for case in drive.table('sections') if case['name'] == 'strand of glass in air')
        document = drive.run('modes', test_sections.problem(case), '--count', '1', '--accuracy', '1e-5')
        mode = document['results'][0]['points'][0]['modes'][0]
        for key, exact in ('index', case['index'][0]), ('group_index', case['group'][0]):
            with self.subTest(key):
                error = abs(mode[key]['value'] - exact)
                self.assertLess(error, 1e-5)
                self.assertLess(error, mode[key]['uncertainty'] + case['digits'])
                # the share of the step to the finest grid, member 16, and the share of the law
                self.assertLess(mode[key]['uncertainty'], 3e-5)

    def test_what_cannot_be_reached_says_so(self):
        """1e-6 is beyond the finest grid: the answer is partial, with a bar that covers."""
        case = next(case for case in drive.table('sections') if case['name'] == 'strand of glass in air')
        document = drive.run('modes', test_sections.problem(case), '--count', '1', '--accuracy', '1e-6')
        self.assertFalse(document['complete'])
        mode = document['results'][0]['points'][0]['modes'][0]
        self.assertLess(abs(mode['index']['value'] - case['index'][0]), mode['index']['uncertainty'])


if __name__ == '__main__':
    unittest.main()
